import { describe, expect, it } from 'vitest';
import { createDuplicateWatch } from './duplicates.ts';
import { stepSequence, type SequenceState } from './sequence.ts';

/** One message: number, and both clocks in ms (the robots' clocks agree with ours unless said otherwise). */
interface Sent {
	readonly seq: number;
	readonly atMs: number;
	readonly stampMs?: number;
}

/** Feeds messages as the gate does; returns the watch and when it found something. */
function feed(messages: readonly Sent[], channel = 'pose') {
	const watch = createDuplicateWatch();
	let state: SequenceState | null = null;
	const foundAt: number[] = [];
	for (const { seq, atMs, stampMs = atMs } of messages) {
		const step = stepSequence(state, seq, stampMs);
		state = step.state;
		if (step.verdict === 'out_of_order') continue;
		if (watch.observe('saltmarsh/porter-01', channel, seq, step.verdict, atMs)) foundAt.push(atMs);
	}
	return { watch, foundAt };
}

/** Two robots taking turns of `turn` messages at 10 Hz, each counting its own from `start`; `aheadMs` is the second one's clock error. */
function taking(turns: number, turn: number, start: readonly [number, number], aheadMs = 0): Sent[] {
	const next = [...start];
	return Array.from({ length: turns * turn }, (_, i) => {
		const who = Math.floor(i / turn) % 2;
		const atMs = i * 100;
		return { seq: next[who]!++, atMs, stampMs: atMs + who * aheadMs };
	});
}

describe('two robots with one credential', () => {
	it.each([
		['counters far apart', taking(20, 10, [5000, 3])],
		['counters that began together', taking(40, 10, [0, 0])],
		['message by message', taking(40, 1, [1000, 0])],
		['clocks that disagree by 3 s', taking(20, 10, [5000, 3], 3000)],
		['clocks that disagree by −3 s', taking(20, 10, [5000, 3], -3000)]
	])('are found within a minute: %s', (_, messages) => {
		const { foundAt } = feed(messages);
		expect(foundAt).toHaveLength(1);
		expect(foundAt[0]).toBeLessThan(60_000);
	});

	it('are found once, and the finding is over after two quiet minutes', () => {
		const { watch, foundAt } = feed(taking(100, 10, [5000, 300]));
		expect(foundAt).toHaveLength(1);
		const lastMs = 100 * 10 * 100;
		expect(watch.clear(lastMs + 60_000)).toEqual([]);
		expect(watch.found()).toEqual(['saltmarsh/porter-01']);
		expect(watch.clear(lastMs + 120_000)).toEqual(['saltmarsh/porter-01']);
		expect(watch.clear(lastMs + 120_000)).toEqual([]);
		expect(watch.found()).toEqual([]);
	});
});

describe('one robot', () => {
	it('that crashes every two seconds is no finding', () => {
		const messages = Array.from({ length: 1200 }, (_, i) => ({ seq: i % 20, atMs: i * 100 }));
		expect(feed(messages).foundAt).toEqual([]);
	});

	it('that loses half of its messages and restarts in between is no finding', () => {
		const messages = Array.from({ length: 2400 }, (_, i) => ({ seq: i % 300, atMs: i * 100 })).filter(
			(_, i) => (i * 7919) % 13 < 6
		);
		expect(feed(messages).foundAt).toEqual([]);
	});

	it('whose link drops for a minute at a time is no finding', () => {
		const messages = Array.from({ length: 6000 }, (_, i) => ({ seq: i, atMs: i * 100 })).filter(
			(_, i) => Math.floor(i / 600) % 2 === 0
		);
		expect(feed(messages).foundAt).toEqual([]);
	});

	it('that never counts is no finding', () => {
		const messages = Array.from({ length: 600 }, (_, i) => ({ seq: 57, atMs: i * 100 }));
		expect(feed(messages).foundAt).toEqual([]);
	});

	it('that goes back to an earlier number once, on three channels at a time, is no finding', () => {
		const watch = createDuplicateWatch();
		const found = ['pose', 'people', 'state'].map((channel) => {
			watch.observe('r', channel, 5000, 'first', 0);
			return watch.observe('r', channel, 4000, 'restart', 1000);
		});
		expect(found).toEqual([false, false, false]);
	});

	it('whose three changes are spread over more than a minute is no finding', () => {
		const watch = createDuplicateWatch();
		watch.observe('r', 'pose', 5000, 'first', 0);
		const found = [0, 30_001, 60_002].map((atMs, i) => watch.observe('r', 'pose', 4000 - i, 'restart', atMs));
		expect(found).toEqual([false, false, false]);
	});
});

it('keeps robots apart', () => {
	const watch = createDuplicateWatch();
	for (let i = 0; i < 30; i++) {
		watch.observe('a', 'pose', 1000 + i, i === 0 ? 'first' : 'next', i * 100);
		watch.observe('b', 'pose', 50 + i, i === 0 ? 'first' : 'next', i * 100);
	}
	expect(watch.found()).toEqual([]);
});
