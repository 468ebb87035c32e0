/** Minutes of density and exposure. A minute may come in two parts around a restart, so parts add up. */

import type { Kysely } from 'kysely';
import type { Database, NewRow } from '../db/schema.ts';

/** Rows per statement: SQLite takes 32,766 variables. */
const ROWS = 1000;

/** Adds density minutes. Means of two parts are weighted by the area and time they observed. */
export async function addDensityMinutes(
	db: Kysely<Database>,
	rows: readonly NewRow<'density_minute'>[]
): Promise<void> {
	for (let from = 0; from < rows.length; from += ROWS) {
		await db
			.insertInto('density_minute')
			.values(rows.slice(from, from + ROWS))
			.onConflict((conflict) =>
				conflict.columns(['zone_id', 'minute_ms']).doUpdateSet(({ eb, ref, fn, val }) => {
					const old = ref('density_minute.observed_m2_s');
					const added = ref('excluded.observed_m2_s');
					const all = fn<number>('max', [eb(old, '+', added), val(1e-9)]);
					const weighted = eb(
						eb(eb(ref('density_minute.mean_per_m2'), '*', old), '+', eb(ref('excluded.mean_per_m2'), '*', added)),
						'/',
						all
					);
					return {
						mean_per_m2: fn.coalesce(weighted, 'density_minute.mean_per_m2', 'excluded.mean_per_m2'),
						peak_per_m2: fn.coalesce(
							fn<number>('max', ['density_minute.peak_per_m2', 'excluded.peak_per_m2']),
							'density_minute.peak_per_m2',
							'excluded.peak_per_m2'
						),
						coverage: fn<number>('max', ['density_minute.coverage', 'excluded.coverage']),
						observed_m2_s: eb(old, '+', added),
						person_s: eb('density_minute.person_s', '+', ref('excluded.person_s'))
					};
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
				conflict.columns(['minute_ms', 'robot_id', 'floor_id', 'zone_id', 'band']).doUpdateSet(({ eb, ref }) => ({
					tasked_s: eb('exposure_minute.tasked_s', '+', ref('excluded.tasked_s')),
					moving_s: eb('exposure_minute.moving_s', '+', ref('excluded.moving_s')),
					distance_m: eb('exposure_minute.distance_m', '+', ref('excluded.distance_m')),
					halts: eb('exposure_minute.halts', '+', ref('excluded.halts'))
				}))
			)
			.execute();
	}
}
