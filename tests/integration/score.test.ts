/** The scoreboard over a few simulated minutes: the same again for the same seed, and good enough to let a change in. */

import { beforeAll, describe, expect, it } from 'vitest';
import { makeScoreboard, type Scoreboard } from '../../simulators/score/report.ts';
import { matchHalts, type DetectedHalt, type ExpectedHalt } from '../../simulators/score/halt-score.ts';
import { runScore, type ScoreOptions } from '../../simulators/score/run.ts';

const SMALL: ScoreOptions = { seed: 5, hours: 0.03, faults: 'all', robots: 4, people: 80 };
/** Six lively minutes of the whole fleet: some ten halts, so that one more or less is no sign. */
const LIVELY: ScoreOptions = { seed: 3, hours: 0.1, faults: 'all', robots: 24, people: null };
/** ms; far beyond what a run takes, for a machine that is busy with other things. */
const PATIENCE = 300_000;

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
	verdict: 'open',
	changes: []
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

	it('hears of a fault in the middle of another halt by the change of its kind', () => {
		const fault: ExpectedHalt = { ...truth(30), kind: 'fault' };
		const turned: DetectedHalt = { ...found(10), changes: [{ kind: 'fault', at: 30.2 }] };
		const { pairs, missed, falseAlarms } = matchHalts([truth(10), fault], [turned]);
		expect(pairs.map((pair) => pair.found.kind)).toEqual(['stall', 'fault']);
		expect([missed.length, falseAlarms.length]).toEqual([0, 0]);
		expect(matchHalts([truth(10), { ...fault, onset: 40 }], [turned]).missed).toHaveLength(1);
	});

	it('does not ask for a halt that does not count', () => {
		expect(matchHalts([truth(10, false)], []).missed).toEqual([]);
	});
});

describe('a run', () => {
	let first: Scoreboard;
	beforeAll(() => {
		first = makeScoreboard(SMALL, runScore(SMALL));
	}, PATIENCE);

	it(
		'gives the same figures for the same seed',
		() => {
			expect(JSON.stringify(makeScoreboard(SMALL, runScore(SMALL)))).toBe(JSON.stringify(first));
		},
		PATIENCE
	);

	it(
		'gives other figures for another seed',
		() => {
			const other = { ...SMALL, seed: 6 };
			const { seed: _a, ...figures } = makeScoreboard(other, runScore(other));
			const { seed: _b, ...before } = first;
			expect(figures).not.toEqual(before);
		},
		PATIENCE
	);

	it('is flat, and names no figure it did not measure', () => {
		for (const value of Object.values(first)) expect(['number', 'string', 'object']).toContain(typeof value);
		expect(Object.values(first).every((value) => value === null || typeof value !== 'object')).toBe(true);
		expect(first.halts_dither === 0 ? first.recall_dither : null).toBeNull();
	});

	it(
		'finds the halts of a lively hall, and hardly any others',
		() => {
			const board = makeScoreboard(LIVELY, runScore(LIVELY));
			expect(board.halts).toBeGreaterThanOrEqual(4);
			expect(board.halts_missed).toBeLessThanOrEqual(1);
			expect(board.false_alarms).toBeLessThanOrEqual(1);
			expect(board.kind_accuracy).toBeGreaterThanOrEqual(0.6);
			expect(board.onset_median_s).toBeLessThanOrEqual(0.5);
			expect(board.delay_p50_s).toBeLessThanOrEqual(9);
			expect(Math.abs(Number(board.density_bias_on_seen))).toBeLessThanOrEqual(0.1);
			expect(Math.abs(Number(board.count_ratio) - 1)).toBeLessThanOrEqual(0.08);
			expect(board.clock_error_p95_ms).toBeLessThanOrEqual(30);
		},
		PATIENCE
	);
});
