/** Notices that floors, robots or credentials were changed in the database, whoever changed them. */

import { sql, type Kysely } from 'kysely';
import type { Database } from './db/schema.ts';

/**
 * A text that changes whenever a floor, zone, map, robot or credential is added, edited or withdrawn. A few small
 * tables are read, so asking every few seconds costs next to nothing.
 */
export async function readConfigurationMark(db: Kysely<Database>): Promise<string> {
	const { rows } = await sql<{ mark: string }>`
		SELECT json_array(
			(SELECT json_group_array(json_array(id, key, name, plan)) FROM floor),
			(SELECT json_group_array(json_array(id, floor_id, map, scale, rotation_rad, tx_m, ty_m)) FROM floor_map),
			(SELECT json_group_array(json_array(id, key, name, polygon, scheme, threshold_per_m2, private)) FROM zone),
			(SELECT json_group_array(json_array(id, key, mark, model_id, retired_at_ms)) FROM robot),
			(SELECT json_group_array(json_array(id, robot_id, password_hash, revoked_at_ms)) FROM robot_credential)
		) AS mark
	`.execute(db);
	return rows[0]?.mark ?? '';
}

/** Returns a function to be called now and then: it calls `onChange` once after each change, but not the first time. */
export function watchConfiguration(db: Kysely<Database>, onChange: () => Promise<void> | void): () => Promise<void> {
	let known: string | null = null;
	return async () => {
		const mark = await readConfigurationMark(db);
		const changed = known !== null && mark !== known;
		known = mark;
		if (changed) await onChange();
	};
}
