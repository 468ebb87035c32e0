/** What was learned about how people give way, per floor. Numbers only: no place, no time, nobody. */

import type { Kysely } from 'kysely';
import { z } from 'zod';
import type { Database } from '../db/schema.ts';

const PREFIX = 'residuals:';
const Residuals = z.array(z.number().min(0)).max(10_000);

/** Residuals in m/s by floor key; what cannot be read is left out, for it can be learned again. */
export async function readResiduals(db: Kysely<Database>): Promise<Map<string, number[]>> {
	const rows = await db.selectFrom('setting').selectAll().where('key', 'like', `${PREFIX}%`).execute();
	return new Map(
		rows.flatMap(({ key, value }) => {
			const { data } = Residuals.safeParse(JSON.parse(value));
			return data ? [[key.slice(PREFIX.length), data] as const] : [];
		})
	);
}

export async function storeResiduals(db: Kysely<Database>, floor: string, residuals: readonly number[]): Promise<void> {
	const value = JSON.stringify(residuals.map((residual) => Math.round(residual * 1000) / 1000));
	await db
		.insertInto('setting')
		.values({ key: PREFIX + floor, value })
		.onConflict((conflict) => conflict.column('key').doUpdateSet({ value }))
		.execute();
}
