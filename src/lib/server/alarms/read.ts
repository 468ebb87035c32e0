/** Alarms as readers see them. */

import type { Kysely } from 'kysely';
import type { AlarmState, LiveAlarm } from '../../contracts/live.ts';
import type { Database } from '../db/schema.ts';

export interface AlarmFilter {
	/** `active` is every state but cleared; all states when left out */
	readonly state?: 'active' | AlarmState | undefined;
	/** Key */
	readonly floor?: string | undefined;
	/** Only alarms that come after this one in the list */
	readonly after?: { readonly atMs: number; readonly id: number } | undefined;
	readonly limit?: number;
}

/** Alarms that pass the filter, newest first by the time they were raised, then by descending id; at most `limit` (1000). */
export async function readLiveAlarms(
	db: Kysely<Database>,
	{ state, floor, after, limit = 1000 }: AlarmFilter = { state: 'active' }
): Promise<LiveAlarm[]> {
	let query = alarms(db);
	if (state === 'active') query = query.where('alarm.state', '<>', 'cleared');
	else if (state !== undefined) query = query.where('alarm.state', '=', state);
	if (floor !== undefined) query = query.where('floor.key', '=', floor);
	if (after !== undefined) {
		query = query.where(({ eb, refTuple, tuple }) =>
			eb(refTuple('alarm.raised_at_ms', 'alarm.id'), '<', tuple(after.atMs, after.id))
		);
	}
	const rows = await query.orderBy('alarm.raised_at_ms', 'desc').orderBy('alarm.id', 'desc').limit(limit).execute();
	return withIncidents(db, rows);
}

/** One alarm, cleared or not. */
export async function readLiveAlarm(db: Kysely<Database>, id: number): Promise<LiveAlarm | undefined> {
	const rows = await alarms(db).where('alarm.id', '=', id).execute();
	return (await withIncidents(db, rows))[0];
}

const alarms = (db: Kysely<Database>) =>
	db
		.selectFrom('alarm')
		.leftJoin('floor', 'floor.id', 'alarm.floor_id')
		.leftJoin('zone', 'zone.id', 'alarm.zone_id')
		.leftJoin('user', 'user.id', 'alarm.acknowledged_by_user_id')
		.select(['alarm.id', 'alarm.type', 'alarm.priority', 'alarm.state'])
		.select(['floor.key as floor', 'zone.key as zone'])
		.select(['alarm.place', 'alarm.what', 'alarm.action', 'alarm.x_m', 'alarm.y_m'])
		.select(['alarm.raised_at_ms', 'alarm.onset_ms', 'alarm.returned_at_ms', 'alarm.acknowledged_at_ms'])
		.select(['user.name as acknowledged_by', 'alarm.revision']);

async function withIncidents(
	db: Kysely<Database>,
	rows: readonly Omit<LiveAlarm, 'robots' | 'incidents'>[]
): Promise<LiveAlarm[]> {
	if (rows.length === 0) return [];
	const ids = rows.map(({ id }) => id);
	const found = await db
		.selectFrom('incident')
		.innerJoin('robot', 'robot.id', 'incident.robot_id')
		.select(['incident.alarm_id', 'incident.id', 'robot.key'])
		.where('incident.alarm_id', 'in', ids)
		.orderBy('incident.onset_ms')
		.orderBy('incident.id')
		.execute();
	return rows.map((row) => {
		const own = found.filter(({ alarm_id }) => alarm_id === row.id);
		return { ...row, robots: [...new Set(own.map(({ key }) => key))], incidents: own.map(({ id }) => id) };
	});
}
