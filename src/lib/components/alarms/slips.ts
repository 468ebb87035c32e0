/** The order of the slips, and how it holds still while somebody is at the column. Pure. */

import type { AlarmPriority, LiveAlarm } from '../../contracts/live.ts';

const RANK: Readonly<Record<AlarmPriority, number>> = { high: 0, medium: 1, low: 2 };

/** Alarms that are not cleared, worst first: priority, then those nobody has acknowledged, then the longest standing. */
export function orderSlips(alarms: readonly LiveAlarm[]): readonly LiveAlarm[] {
	return alarms
		.filter(({ state }) => state !== 'cleared')
		.toSorted(
			(a, b) =>
				RANK[a.priority] - RANK[b.priority] ||
				Number(isAcknowledged(a)) - Number(isAcknowledged(b)) ||
				a.onset_ms - b.onset_ms ||
				a.id - b.id
		);
}

export const isAcknowledged = ({ acknowledged_at_ms }: LiveAlarm): boolean => acknowledged_at_ms !== null;

export interface Slips {
	/** To show, in this order */
	readonly shown: readonly LiveAlarm[];
	/** Not yet shown: they came while somebody was at the column, worst first */
	readonly waiting: readonly LiveAlarm[];
}

/**
 * What the column shows.
 *
 * @param held ids in the order shown when somebody came to the column; they keep their places with their news, even
 * when cleared meanwhile. null while nobody is there: everything is shown in order.
 */
export function arrangeSlips(alarms: readonly LiveAlarm[], held: readonly number[] | null): Slips {
	const ordered = orderSlips(alarms);
	if (held === null) return { shown: ordered, waiting: [] };
	const byId = new Map(alarms.map((alarm) => [alarm.id, alarm]));
	const kept = new Set(held);
	return {
		shown: held.flatMap((id) => byId.get(id) ?? []),
		waiting: ordered.filter(({ id }) => !kept.has(id))
	};
}
