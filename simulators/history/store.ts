/** Writes invented days into the database with prepared statements, a week per transaction. */

import type Sqlite from 'better-sqlite3';
import { guidanceFor } from '../../src/lib/domain/alarms/guidance.ts';
import type { HistoryDay, HistoryFloor, HistoryHalt } from './generate.ts';

export interface StoreContext {
	readonly venueId: number;
	readonly venueKey: string;
	/** Users who acknowledge, by turns */
	readonly operators: readonly string[];
}

/** Prepared inserts on one connection. Rows that are there already are left as they are. */
export function createHistoryWriter(raw: Sqlite.Database, { venueId, venueKey, operators }: StoreContext) {
	const density = raw.prepare('INSERT OR IGNORE INTO density_minute VALUES (?, ?, ?, ?, ?, ?, ?, ?)');
	const exposure = raw.prepare('INSERT OR IGNORE INTO exposure_minute VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)');
	const alarm = raw.prepare(
		`INSERT INTO alarm (venue_id, dedupe_key, type, priority, state, floor_id, zone_id, place, what, action, x_m, y_m,
			onset_ms, raised_at_ms, returned_at_ms, acknowledged_at_ms, acknowledged_by_user_id, revision)
		VALUES (?, ?, ?, ?, 'cleared', ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`
	);
	const alarmEvent = raw.prepare(
		'INSERT INTO alarm_event (alarm_id, at_ms, act, actor_user_id, reason, state) VALUES (?, ?, ?, ?, NULL, ?)'
	);
	const incident = raw.prepare(
		`INSERT OR IGNORE INTO incident (id, venue_id, robot_id, floor_id, zone_id, alarm_id, cause_group, kind, verdict, onset_ms,
			detected_ms, ended_ms, end_reason, x_m, y_m, heading_rad, density_per_m2, density_coverage, room_alone_m_s,
			room_shared_m_s, persons_within_2m, nearest_person_m, observed_share, flexibility_m_s, software, task_id, evidence)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, 'progress', ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`
	);
	let turn = 0;

	function storeHalt(floor: HistoryFloor, halt: HistoryHalt): void {
		const { robot, zone, kind, verdict, onsetMs, detectedMs, endedMs, place, moment, acknowledgedMs } = halt;
		const id = `${venueKey}.${robot.key}.${onsetMs}`;
		const group = `cause-${id}`;
		const { priority, what, action } = guidanceFor(kind, verdict);
		const by = operators[turn++ % Math.max(1, operators.length)] ?? null;
		const inTime = acknowledgedMs < endedMs;
		const { lastInsertRowid } = alarm.run(
			venueId,
			`cause:${group}`,
			kind,
			priority,
			floor.id,
			zone.id,
			`${zone.name}, ${floor.name}`,
			what,
			action,
			place.x,
			place.y,
			onsetMs,
			detectedMs,
			endedMs,
			acknowledgedMs,
			by,
			3
		);
		alarmEvent.run(lastInsertRowid, detectedMs, 'raise', null, 'unacknowledged');
		if (inTime) {
			alarmEvent.run(lastInsertRowid, acknowledgedMs, 'acknowledge', by, 'acknowledged');
			alarmEvent.run(lastInsertRowid, endedMs, 'clear', null, 'cleared');
		} else {
			alarmEvent.run(lastInsertRowid, endedMs, 'clear', null, 'returned');
			alarmEvent.run(lastInsertRowid, acknowledgedMs, 'acknowledge', by, 'cleared');
		}
		const {
			density: around,
			coverage,
			roomAlone,
			roomShared,
			personsWithin2m,
			nearestPerson,
			observedShare,
			flexibility
		} = moment;
		incident.run(
			...[
				id,
				venueId,
				robot.id,
				floor.id,
				zone.id,
				lastInsertRowid,
				group,
				kind,
				verdict,
				onsetMs,
				detectedMs,
				endedMs
			],
			...[place.x, place.y, halt.heading, around, coverage, roomAlone, roomShared, personsWithin2m, nearestPerson],
			...[observedShare, flexibility, halt.software, halt.task, JSON.stringify({ before: moment, at: moment })]
		);
	}

	const setting = raw.prepare(
		'INSERT INTO setting (key, value) VALUES (?, ?) ON CONFLICT (key) DO UPDATE SET value = excluded.value'
	);

	/** Several days and the note of how far we are, in one transaction: a run that is cut short leaves no half week. */
	return raw.transaction((days: readonly { floor: HistoryFloor; day: HistoryDay }[], key: string, progress: string) => {
		setting.run(key, progress);
		for (const { floor, day } of days) {
			for (const row of day.density) {
				density.run(floor.id, row.zone, row.minuteMs, row.mean, row.peak, row.coverage, row.observedAreaS, row.personS);
			}
			for (const row of day.exposure) {
				exposure.run(
					row.robot,
					floor.id,
					row.zone,
					row.minuteMs,
					row.band,
					row.taskedS,
					row.movingS,
					row.distance,
					row.halts
				);
			}
			for (const halt of day.halts) storeHalt(floor, halt);
		}
	}).immediate;
}
