/** How a floor's picture in the browser changes with each event of the live stream. Pure. */

import type { LiveAlarm, LiveDelta, LiveFrame } from '../contracts/live.ts';

/** Cleared alarms kept in the list, so that a slip does not vanish while somebody reads it. */
const CLEARED_KEPT = 20;

/**
 * The frame after `delta`. Robots and zones named in the delta replace their predecessors and keep their place,
 * unknown ones are appended; people are replaced whole; halts stay when the delta does not name them.
 */
export function mergeDelta(frame: LiveFrame, delta: LiveDelta): LiveFrame {
	const gone = new Set(delta.robots_gone);
	return {
		...frame,
		server_time_ms: delta.server_time_ms,
		robots: replaceByKey(frame.robots, delta.robots).filter(({ key }) => !gone.has(key)),
		persons: delta.persons,
		zones: replaceByKey(frame.zones, delta.zones),
		halts: delta.halts ?? frame.halts,
		flexibility: delta.flexibility ?? frame.flexibility,
		observed_m2: delta.observed_m2,
		coverage: delta.coverage
	};
}

/** The alarms after news of one. An older revision than the one known is ignored: answers and events may cross. */
export function mergeAlarm(alarms: readonly LiveAlarm[], news: LiveAlarm): readonly LiveAlarm[] {
	const known = alarms.find(({ id }) => id === news.id);
	if (known && known.revision >= news.revision) return alarms;
	const next = known ? alarms.map((alarm) => (alarm.id === news.id ? news : alarm)) : [...alarms, news];
	const cleared = next.filter(({ state }) => state === 'cleared');
	const dropped = new Set(cleared.slice(0, Math.max(0, cleared.length - CLEARED_KEPT)).map(({ id }) => id));
	return dropped.size ? next.filter(({ id }) => !dropped.has(id)) : next;
}

function replaceByKey<T extends { readonly key: string }>(known: readonly T[], news: readonly T[]): readonly T[] {
	if (news.length === 0) return known;
	const byKey = new Map(news.map((item) => [item.key, item]));
	const replaced = known.map((item) => byKey.get(item.key) ?? item);
	const had = new Set(known.map(({ key }) => key));
	return [...replaced, ...news.filter(({ key }) => !had.has(key))];
}
