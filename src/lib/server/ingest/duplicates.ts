/** Notices two robots that use one credential, from their numbers alone, whatever the broker does about it. */

import type { SequenceVerdict } from './sequence.ts';

/** Signs on one channel within WINDOW_MS that make it a finding. */
const SIGNS = 3;
const WINDOW_MS = 60_000;
/** A finding is over after this long without a sign. */
const QUIET_MS = 120_000;
/** A robot that starts anew begins near zero, even if its first messages are lost; chosen by us: 1 s at 10 Hz. */
const FRESH_START = 10;
/** Numbers missing in one go beyond which losing them is less likely than another counter; chosen by us: 5 s at 10 Hz. */
const LEAP = 50;
/** How far a robot may have counted on while the other one spoke; chosen by us: 100 s at 10 Hz. */
const LONGEST_TURN = 1000;

interface Counter {
	last: number;
	/** Where the counter stood before its last restart; null when there was none. */
	left: number | null;
	signs: number[];
}

export interface DuplicateWatch {
	/**
	 * Takes one accepted message; true when it turns suspicion into a finding.
	 *
	 * @param robot any key that tells robots apart over all venues
	 */
	observe(robot: string, channel: string, seq: number, verdict: SequenceVerdict, receivedAtMs: number): boolean;
	/** Robots whose finding is over at `nowMs`; each is named once. */
	clear(nowMs: number): string[];
	/** Robots with a finding now. */
	found(): string[];
}

/**
 * A watch that has seen nothing yet.
 *
 * One robot's numbers rise; after a restart they begin near zero. Two robots in turn make them fall to somewhere else
 * than zero, and leap back to where the first one was: each such change is a sign. A robot that restarts again and
 * again, or loses its link again and again, gives none. Messages the sequence check refused do not count, because a
 * backlog sent late looks the same.
 */
export function createDuplicateWatch(): DuplicateWatch {
	const counters = new Map<string, Counter>();
	/** Robot → last sign, ms */
	const findings = new Map<string, number>();

	return {
		observe(robot, channel, seq, verdict, receivedAtMs) {
			const key = `${robot} ${channel}`;
			const counter = counters.get(key);
			if (counter === undefined || verdict === 'first') {
				counters.set(key, { last: seq, left: null, signs: counter?.signs ?? [] });
				return false;
			}
			const sign = isSign(counter, seq, verdict);
			if (verdict === 'restart') counter.left = counter.last;
			counter.last = seq;
			if (!sign) return false;

			counter.signs = [...counter.signs.filter((at) => receivedAtMs - at < WINDOW_MS), receivedAtMs].slice(-SIGNS);
			const known = findings.has(robot);
			if (known || counter.signs.length >= SIGNS) findings.set(robot, receivedAtMs);
			return !known && findings.has(robot);
		},
		clear(nowMs) {
			const over = [...findings].filter(([, lastMs]) => nowMs - lastMs >= QUIET_MS).map(([robot]) => robot);
			for (const robot of over) findings.delete(robot);
			return over;
		},
		found: () => [...findings.keys()]
	};
}

function isSign({ last, left }: Counter, seq: number, verdict: SequenceVerdict): boolean {
	// An equal number is a robot that does not count at all.
	if (verdict === 'restart') return seq >= FRESH_START && seq < last;
	return left !== null && seq - last > LEAP && seq > left && seq - left <= LONGEST_TURN;
}
