/** What changed on a floor from one frame to the next. Pure. */

import { isDeepStrictEqual } from 'node:util';
import type { LiveDelta, LiveFrame } from '../../contracts/live.ts';

interface Keyed {
	readonly key: string;
}

/** Applied to `before`, the result gives `after`, but for the order of robots and zones. Both are of one floor. */
export function computeDelta(before: LiveFrame, after: LiveFrame): LiveDelta {
	const present = new Set(after.robots.map(({ key }) => key));
	return {
		server_time_ms: after.server_time_ms,
		robots: changed(before.robots, after.robots),
		robots_gone: before.robots.map(({ key }) => key).filter((key) => !present.has(key)),
		persons: after.persons,
		zones: changed(before.zones, after.zones),
		...(isDeepStrictEqual(before.halts, after.halts) ? {} : { halts: after.halts }),
		...(isDeepStrictEqual(before.flexibility, after.flexibility) ? {} : { flexibility: after.flexibility }),
		observed_m2: after.observed_m2,
		coverage: after.coverage
	};
}

/**
 * Whether a delta can lead from one frame to the other: a delta cannot take a zone away, so a floor whose zones were
 * edited needs a new snapshot.
 */
export function canFollow(before: LiveFrame, after: LiveFrame): boolean {
	const zones = new Set(after.zones.map(({ key }) => key));
	return before.zones.every(({ key }) => zones.has(key)) && before.venue === after.venue;
}

function changed<T extends Keyed>(before: readonly T[], after: readonly T[]): T[] {
	const known = new Map(before.map((item) => [item.key, item]));
	return after.filter((item) => !isDeepStrictEqual(known.get(item.key), item));
}
