/** Somebody confirms that they have seen an alarm. */

import type { Kysely } from 'kysely';
import type { LiveAlarm } from '../../contracts/live.ts';
import { Failure } from '../../domain/failure.ts';
import type { Database } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';
import type { LiveHub } from '../live/hub.ts';
import { insertAuditEvent } from '../repositories/users.ts';
import { readLiveAlarm } from './read.ts';
import { storeAlarmStep } from './step.ts';

/**
 * Acknowledges an alarm and tells the readers. A second acknowledgement changes nothing: the first one's name and time
 * stay, whoever of two was the faster.
 *
 * @throws Failure 'not_found' | 'storage'
 */
export async function acknowledgeAlarm(
	{ db, hub }: { readonly db: Kysely<Database>; readonly hub: Pick<LiveHub, 'publishAlarm'> },
	{ alarmId, by, nowMs }: { alarmId: number; by: string; nowMs: number }
): Promise<{ alarm: LiveAlarm; changed: boolean }> {
	const result = await writeTransaction(db, async (trx) => {
		const row = await trx.selectFrom('alarm').selectAll().where('id', '=', alarmId).executeTakeFirst();
		if (row === undefined) throw new Failure('not_found', 'There is no such alarm.');
		const { changes } = await storeAlarmStep(trx, row, { type: 'acknowledge', atMs: nowMs, by });
		const changed = changes.length > 0;
		if (changed) {
			const subject = `alarm ${alarmId}`;
			await insertAuditEvent(trx, { at_ms: nowMs, actor_user_id: by, act: 'alarm_acknowledged', subject });
		}
		const alarm = await readLiveAlarm(trx, alarmId);
		if (alarm === undefined) throw new Error(`Alarm ${alarmId} is gone in the middle of its change.`);
		return { alarm, changed };
	});
	if (result.changed) hub.publishAlarm(result.alarm);
	return result;
}
