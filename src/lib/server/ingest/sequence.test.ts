import fc from 'fast-check';
import { expect, it } from 'vitest';
import { RESTART_RUN, stepSequence, type SequenceState } from './sequence.ts';

/** Feeds [seq, stamp] pairs and returns the verdicts. */
function run(messages: readonly (readonly [seq: number, tMs: number])[]) {
	let state: SequenceState | null = null;
	return messages.map(([seq, tMs]) => {
		const step = stepSequence(state, seq, tMs);
		state = step.state;
		return step.verdict;
	});
}

it('takes the first message whatever its number', () => {
	expect(run([[900, 1000]])).toEqual(['first']);
});

it('takes higher numbers over gaps and over a clock that is set back', () => {
	expect(
		run([
			[1, 1000],
			[2, 1100],
			[40, 5000],
			[41, 200]
		])
	).toEqual(['first', 'next', 'next', 'next']);
});

it('refuses a copy and a straggler', () => {
	expect(
		run([
			[1, 1000],
			[3, 1200],
			[3, 1200],
			[2, 1100]
		])
	).toEqual(['first', 'next', 'out_of_order', 'out_of_order']);
});

it('takes a lower number with a later stamp for a restart', () => {
	expect(
		run([
			[500, 1000],
			[0, 1100],
			[1, 1200]
		])
	).toEqual(['first', 'restart', 'next']);
});

it('takes a restart with the clock set back after five rising messages, and not before', () => {
	const again = [0, 1, 2, 3, 4, 5].map((i) => [i, 10 + i] as const);
	expect(run([[500, 1000], ...again]).slice(1)).toEqual([
		...new Array<string>(RESTART_RUN - 1).fill('out_of_order'),
		'restart',
		'next'
	]);
});

it('does not take stragglers between good messages for a restart, however many', () => {
	const mixed = Array.from({ length: 40 }, (_, i) =>
		i % 2 === 0 ? ([500 + i, 1000 + i] as const) : ([i, i] as const)
	);
	expect(run(mixed)).not.toContain('restart');
});

it('does not take copies of one old message for a restart, however many', () => {
	expect(run([[500, 1000], ...new Array<[number, number]>(50).fill([7, 10])])).not.toContain('restart');
});

it('never accepts the same message twice in a row', () => {
	const messages = fc.array(fc.tuple(fc.nat(20), fc.nat(20)), { minLength: 1 });
	fc.assert(
		fc.property(messages, (list) => {
			const last = list[list.length - 1] as [number, number];
			const verdicts = run([...list, last, last]);
			expect(verdicts[verdicts.length - 1]).toBe('out_of_order');
		})
	);
});

it('accepts every message of a robot that only counts up, whatever its clock does', () => {
	fc.assert(
		fc.property(fc.array(fc.integer({ min: 0, max: 1e6 })), (stamps) => {
			expect(run(stamps.map((tMs, i) => [i, tMs]))).not.toContain('out_of_order');
		})
	);
});
