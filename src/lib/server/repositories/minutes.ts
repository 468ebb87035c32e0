/** Minutes of density and exposure. A minute may come in two parts around a restart, so parts add up. */

import { sql, type Kysely } from 'kysely';
import type { Database, NewRow } from '../db/schema.ts';

/** Rows per statement: SQLite takes 32,766 variables. */
const ROWS = 1000;

/** Adds density minutes. Means of two parts are weighted by the area and time they observed; a part that measured nothing has no say. */
export async function addDensityMinutes(
	db: Kysely<Database>,
	rows: readonly NewRow<'density_minute'>[]
): Promise<void> {
	for (let from = 0; from < rows.length; from += ROWS) {
		await db
			.insertInto('density_minute')
			.values(rows.slice(from, from + ROWS))
			.onConflict((conflict) =>
				conflict.columns(['zone_id', 'minute_ms']).doUpdateSet({
					mean_per_m2: sql`coalesce(
						(density_minute.mean_per_m2 * density_minute.observed_m2_s + excluded.mean_per_m2 * excluded.observed_m2_s)
							/ nullif(density_minute.observed_m2_s + excluded.observed_m2_s, 0),
						density_minute.mean_per_m2,
						excluded.mean_per_m2
					)`,
					peak_per_m2: sql`coalesce(
						max(density_minute.peak_per_m2, excluded.peak_per_m2),
						density_minute.peak_per_m2,
						excluded.peak_per_m2
					)`,
					coverage: sql`max(density_minute.coverage, excluded.coverage)`,
					observed_m2_s: sql`density_minute.observed_m2_s + excluded.observed_m2_s`,
					person_s: sql`density_minute.person_s + excluded.person_s`
				})
			)
			.execute();
	}
}

export async function addExposureMinutes(
	db: Kysely<Database>,
	rows: readonly NewRow<'exposure_minute'>[]
): Promise<void> {
	for (let from = 0; from < rows.length; from += ROWS) {
		await db
			.insertInto('exposure_minute')
			.values(rows.slice(from, from + ROWS))
			.onConflict((conflict) =>
				conflict.columns(['minute_ms', 'robot_id', 'floor_id', 'zone_id', 'band']).doUpdateSet({
					tasked_s: sql`exposure_minute.tasked_s + excluded.tasked_s`,
					moving_s: sql`exposure_minute.moving_s + excluded.moving_s`,
					distance_m: sql`exposure_minute.distance_m + excluded.distance_m`,
					halts: sql`exposure_minute.halts + excluded.halts`
				})
			)
			.execute();
	}
}
