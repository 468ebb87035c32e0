/** An alarm's condition comes and goes. Used by the engine thread; nothing is published here. */

import type { Kysely } from 'kysely';
import type { AlarmPriority, AlarmType, LiveAlarm } from '../../contracts/live.ts';
import { worse } from '../../domain/alarms/guidance.ts';
import type { Database, Row } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';
import { readLiveAlarm } from './read.ts';
import { storeAlarmStep } from './step.ts';

export interface Raise {
	readonly venueId: number;
	/** What makes two alarms the same, for example the cause group of a halt */
	readonly dedupeKey: string;
	readonly type: AlarmType;
	readonly priority: AlarmPriority;
	readonly floorId: number | null;
	readonly zoneId: number | null;
	/** In words a person on the floor understands */
	readonly place: string;
	readonly what: string;
	readonly action: string;
	/** m, floor frame */
	readonly x: number | null;
	readonly y: number | null;
	readonly onsetMs: number;
	readonly atMs: number;
	/** A stored incident that belongs to it */
	readonly incident?: string;
}

/**
 * The condition is true: makes a new alarm, or goes on with the one of the same key that is not cleared yet. That one
 * calls for attention again if it had returned, and takes over the new words when they are more urgent or about the
 * only incident it has; otherwise it keeps its own and the incident merely joins.
 *
 * @throws Failure 'storage'
 */
export async function raiseAlarm(db: Kysely<Database>, raise: Raise): Promise<LiveAlarm> {
	return writeTransaction(db, async (trx) => {
		const known = await readByDedupeKey(trx, raise.venueId, raise.dedupeKey);
		const row = known ?? (await insert(trx, raise));
		await storeAlarmStep(trx, row, { type: 'raise', atMs: raise.atMs });
		if (raise.incident !== undefined) {
			await trx.updateTable('incident').set({ alarm_id: row.id }).where('id', '=', raise.incident).execute();
		}
		if (known !== undefined) await bringUpToDate(trx, known, raise);
		return reread(trx, row.id);
	});
}

/**
 * The condition is no more. Null when that changes nothing: the alarm has returned or is cleared already.
 *
 * @throws Failure 'storage'
 */
export async function returnAlarm(db: Kysely<Database>, alarmId: number, atMs: number): Promise<LiveAlarm | null> {
	return writeTransaction(db, async (trx) => {
		const known = await trx.selectFrom('alarm').selectAll().where('id', '=', alarmId).executeTakeFirst();
		if (known === undefined) return null;
		const { changes } = await storeAlarmStep(trx, known, { type: 'clear', atMs });
		return changes.length === 0 ? null : reread(trx, alarmId);
	});
}

/** As an alarm that has not been raised yet. */
const insert = (trx: Kysely<Database>, raise: Raise): Promise<Row<'alarm'>> =>
	trx
		.insertInto('alarm')
		.values({
			...facts(raise),
			venue_id: raise.venueId,
			dedupe_key: raise.dedupeKey,
			state: 'cleared',
			onset_ms: raise.onsetMs,
			raised_at_ms: raise.atMs,
			revision: 0
		})
		.returningAll()
		.executeTakeFirstOrThrow();

async function bringUpToDate(trx: Kysely<Database>, known: Row<'alarm'>, raise: Raise): Promise<void> {
	const urgent = worse(known.priority, raise.priority) !== known.priority;
	const takesOver = urgent || known.state === 'returned' || (await isOnlyIncident(trx, known.id, raise.incident));
	await trx
		.updateTable('alarm')
		.set(takesOver ? facts(raise) : {})
		// Also when only the list of its incidents changed, so that readers take the news for news.
		.set(({ eb }) => ({ revision: eb('revision', '+', 1) }))
		.where('id', '=', known.id)
		.execute();
}

async function isOnlyIncident(trx: Kysely<Database>, alarmId: number, incident: string | undefined): Promise<boolean> {
	const rows = await trx.selectFrom('incident').select('id').where('alarm_id', '=', alarmId).limit(2).execute();
	return rows.every(({ id }) => id === incident);
}

const facts = ({ type, priority, floorId, zoneId, place, what, action, x, y }: Raise) => ({
	type,
	priority,
	floor_id: floorId,
	zone_id: zoneId,
	place,
	what,
	action,
	x_m: x,
	y_m: y
});

/** At most one alarm of a key is not cleared: an index sees to it. */
const readByDedupeKey = (trx: Kysely<Database>, venueId: number, dedupeKey: string) =>
	trx
		.selectFrom('alarm')
		.selectAll()
		.where('venue_id', '=', venueId)
		.where('dedupe_key', '=', dedupeKey)
		.where('state', '<>', 'cleared')
		.executeTakeFirst();

async function reread(trx: Kysely<Database>, id: number): Promise<LiveAlarm> {
	const alarm = await readLiveAlarm(trx, id);
	if (alarm === undefined) throw new Error(`Alarm ${id} is gone in the middle of its change.`);
	return alarm;
}
