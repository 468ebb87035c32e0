/** The scoreboard over a few simulated minutes: the same again for the same seed, and good enough to let a change in. */

import { beforeAll, describe, expect, it } from 'vitest';
import { makeScoreboard, type Scoreboard } from '../../simulators/score/report.ts';
import { matchHalts, type DetectedHalt, type ExpectedHalt } from '../../simulators/score/halt-score.ts';
import { runScore, type ScoreOptions } from '../../simulators/score/run.ts';

const SMALL: ScoreOptions = { seed: 5, hours: 0.03, faults: 'all', robots: 4, people: 80 };

const truth = (onset: number, counts = true): ExpectedHalt => ({
	robot: 'porter-01',
	kind: 'stall',
	cause: 'robots',
	onset,
	end: onset + 20,
	verdict: 'open',
	counts
});
const found = (onset: number, robot = 'porter-01'): DetectedHalt => ({
	robot,
	kind: 'stall',
	lastKind: 'stall',
	onset,
	detectedAt: onset + 8,
	end: null,
	verdict: 'open'
});

describe('matching', () => {
	it('pairs one to one within 5 s and by robot', () => {
		const { pairs, missed, falseAlarms } = matchHalts(
			[truth(10), truth(100)],
			[found(11), found(12), found(106), found(100, 'porter-02')]
		);
		expect(pairs.map(({ found: { onset } }) => onset)).toEqual([11]);
		expect(missed.map(({ onset }) => onset)).toEqual([100]);
		expect(falseAlarms).toHaveLength(3);
	});

	it('gives a report to a halt that counts before one that does not', () => {
		const { pairs, missed, falseAlarms } = matchHalts([truth(10, false), truth(13)], [found(10)]);
		expect(pairs.map(({ truth: { onset } }) => onset)).toEqual([13]);
		expect([missed.length, falseAlarms.length]).toEqual([0, 0]);
	});

	it('does not ask for a halt that does not count', () => {
		expect(matchHalts([truth(10, false)], []).missed).toEqual([]);
	});
});

describe('a run', () => {
	let first: Scoreboard;
	beforeAll(() => {
		first = makeScoreboard(SMALL, runScore(SMALL));
	});

	it('gives the same figures for the same seed', () => {
		expect(JSON.stringify(makeScoreboard(SMALL, runScore(SMALL)))).toBe(JSON.stringify(first));
	});

	it('gives other figures for another seed', () => {
		const other = { ...SMALL, seed: 6 };
		const { seed: _a, ...figures } = makeScoreboard(other, runScore(other));
		const { seed: _b, ...before } = first;
		expect(figures).not.toEqual(before);
	});

	it('is flat, and names no figure it did not measure', () => {
		for (const value of Object.values(first)) expect(['number', 'string', 'object']).toContain(typeof value);
		expect(Object.values(first).every((value) => value === null || typeof value !== 'object')).toBe(true);
		expect(first.halts_dither === 0 ? first.recall_dither : null).toBeNull();
	});
});
