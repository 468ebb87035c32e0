/** Incidents as the engine writes them: one row from onset to end. */

import type { Kysely } from 'kysely';
import type { HaltKind } from '../../contracts/live.ts';
import type { Database, NewRow } from '../db/schema.ts';

/** Stores an incident; one that is there already is left as it is. */
export async function insertIncident(db: Kysely<Database>, incident: NewRow<'incident'>): Promise<void> {
	await db
		.insertInto('incident')
		.values(incident)
		.onConflict((conflict) => conflict.column('id').doNothing())
		.execute();
}

export async function changeIncidentKind(db: Kysely<Database>, id: string, kind: HaltKind): Promise<void> {
	await db.updateTable('incident').set({ kind }).where('id', '=', id).execute();
}

/** Closes an incident; an end that is stored already stays. */
export async function endIncident(db: Kysely<Database>, id: string, endedMs: number, reason: string): Promise<void> {
	await db
		.updateTable('incident')
		.set({ ended_ms: endedMs, end_reason: reason })
		.where('id', '=', id)
		.where('ended_ms', 'is', null)
		.execute();
}

/** Open incidents of one alarm. */
export async function countOpenOfAlarm(db: Kysely<Database>, alarmId: number): Promise<number> {
	const { open } = await db
		.selectFrom('incident')
		.select(({ fn }) => fn.countAll<number>().as('open'))
		.where('alarm_id', '=', alarmId)
		.where('ended_ms', 'is', null)
		.executeTakeFirstOrThrow();
	return open;
}

/** Alarm an incident belongs to; null when it has none, undefined when there is no such incident. */
export async function alarmOfIncident(db: Kysely<Database>, id: string): Promise<number | null | undefined> {
	const row = await db.selectFrom('incident').select('alarm_id').where('id', '=', id).executeTakeFirst();
	return row?.alarm_id;
}

/** Incidents that have not ended, oldest first; at most `limit`. */
export async function readOpenHaltRows(db: Kysely<Database>, limit = 10_000) {
	return db
		.selectFrom('incident')
		.innerJoin('robot', 'robot.id', 'incident.robot_id')
		.leftJoin('zone', 'zone.id', 'incident.zone_id')
		.selectAll('incident')
		.select(['robot.key as robot', 'zone.key as zone'])
		.where('incident.ended_ms', 'is', null)
		.orderBy('incident.onset_ms')
		.limit(limit)
		.execute();
}
