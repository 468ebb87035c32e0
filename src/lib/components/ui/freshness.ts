/** How old the picture is, in words. Nobody should have to guess whether a still plan is a quiet floor or a dead line. */

import type { Link } from '../../state/live-floor.svelte.ts';
import { age, clockTime } from './format.ts';

export interface Freshness {
	readonly words: string;
	/** `live` and nothing to worry about, `old` but still connected, `none` without a connection */
	readonly level: 'live' | 'old' | 'none';
}

/** ms after which data is called old: several frames must have been missed. Chosen by us. */
const OLD_AFTER_MS = 2000;

/**
 * @param ageMs ms since the last frame was made; null before the first
 * @param lastSeenMs server time of the last frame, ms since the epoch
 */
export function describeFreshness(
	link: Link,
	ageMs: number | null,
	lastSeenMs: number | null,
	timeZone: string
): Freshness {
	const since = lastSeenMs === null ? '' : `, last seen ${clockTime(lastSeenMs, timeZone)}`;
	if (link === 'signed-out') return { words: `signed out${since}`, level: 'none' };
	if (link === 'lost') return { words: `no connection${since}`, level: 'none' };
	if (ageMs === null) return { words: link === 'open' ? 'waiting for the first data' : 'connecting', level: 'old' };
	if (ageMs >= OLD_AFTER_MS) return { words: `data is ${age(ageMs)} old`, level: 'old' };
	return { words: `live ${(Math.max(0, ageMs) / 1000).toFixed(1)} s ago`, level: 'live' };
}
