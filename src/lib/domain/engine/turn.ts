/** Whose turn is it? Work every robot needs now and then is spread over time, so that no one step has to do all of it. */

/**
 * Whether something last done for `robot` at `last` is due again at `now`, both s. Every robot has its own beat of `every`
 * seconds, told from its key: the first time comes at once (`last` = −Infinity), the second with the beat, so at most
 * `every` later, and then once per beat.
 */
export function isTurn(robot: string, last: number, now: number, every: number): boolean {
	const start = phaseOf(robot) * every;
	return Math.floor((now - start) / every) > Math.floor((last - start) / every);
}

/** 0…1, evenly spread over keys that differ by a digit: FNV-1a of Fowler, Noll & Vo (from memory), mixed once more. */
function phaseOf(robot: string): number {
	let hash = 0x811c9dc5;
	for (let k = 0; k < robot.length; k++) hash = Math.imul(hash ^ robot.charCodeAt(k), 0x01000193);
	hash = Math.imul(hash ^ (hash >>> 15), 0x2c1b3c6d);
	return ((hash ^ (hash >>> 13)) >>> 0) / 4294967296;
}
