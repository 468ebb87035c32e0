/** Applies the alarm life cycle to a stored alarm. */

import type { Kysely } from 'kysely';
import {
	CLEARED_ALARM,
	stepAlarm,
	type AlarmAct,
	type AlarmCore,
	type AlarmStep
} from '../../domain/alarms/life-cycle.ts';
import { msFromSeconds, secondsFromMs } from '../../domain/units.ts';
import type { Database, Row } from '../db/schema.ts';

/** What happens to an alarm; who did it where a person does. */
export type StoredAct =
	| { readonly type: 'raise' | 'clear'; readonly atMs: number }
	| { readonly type: 'acknowledge'; readonly atMs: number; readonly by: string };

/**
 * Steps `row` by one act, stores the new state and one event per change of it, and raises the revision when something
 * changed. Pass the transaction in which `row` was read.
 */
export async function storeAlarmStep(trx: Kysely<Database>, row: Row<'alarm'>, act: StoredAct): Promise<AlarmStep> {
	const step = stepAlarm(coreFrom(row), actFrom(act));
	if (step.changes.length === 0) return step;
	const { state, returnedAt, acknowledgedAt, acknowledgedBy } = step.alarm;
	await trx
		.updateTable('alarm')
		.set({
			state,
			returned_at_ms: returnedAt === null ? null : msFromSeconds(returnedAt),
			acknowledged_at_ms: acknowledgedAt === null ? null : msFromSeconds(acknowledgedAt),
			acknowledged_by_user_id: acknowledgedBy,
			revision: row.revision + 1
		})
		.where('id', '=', row.id)
		.execute();
	for (const { by, reason } of step.changes.filter(({ what }) => what === 'state')) {
		await trx
			.insertInto('alarm_event')
			.values({ alarm_id: row.id, at_ms: act.atMs, act: act.type, actor_user_id: by, reason, state })
			.execute();
	}
	return step;
}

const actFrom = (act: StoredAct): AlarmAct =>
	act.type === 'acknowledge'
		? { type: act.type, at: secondsFromMs(act.atMs), by: act.by }
		: { type: act.type, at: secondsFromMs(act.atMs) };

const coreFrom = (row: Row<'alarm'>): AlarmCore => ({
	...CLEARED_ALARM,
	state: row.state,
	active: row.state === 'unacknowledged' || row.state === 'acknowledged',
	raisedAt: secondsFromMs(row.raised_at_ms),
	returnedAt: row.returned_at_ms === null ? null : secondsFromMs(row.returned_at_ms),
	acknowledgedAt: row.acknowledged_at_ms === null ? null : secondsFromMs(row.acknowledged_at_ms),
	acknowledgedBy: row.acknowledged_by_user_id
});
