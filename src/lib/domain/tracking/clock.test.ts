import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { DEFAULT_CLOCK_RULE, startClock, stepClock, type ClockReading, type ClockState } from './clock.ts';

/** Feeds [robot time, received at] pairs and returns every reading. */
function feed(messages: readonly (readonly [number, number])[], start: ClockState = startClock()): ClockReading[] {
	let state = start;
	return messages.map(([robotTime, receivedAt]) => {
		const reading = stepClock(state, robotTime, receivedAt);
		state = reading.state;
		return reading;
	});
}
const verdicts = (readings: readonly ClockReading[]) => [...new Set(readings.map(({ verdict }) => verdict))];
/** n messages at `rate` Hz from `from` on, robot ahead by `offset`, each `transit` seconds on its way. */
const steady = (from: number, n: number, offset: number, transit = 0.02, rate = 5): [number, number][] =>
	Array.from({ length: n }, (_, k) => [from + k / rate + offset, from + k / rate + transit]);

describe('offset', () => {
	it('is whatever the first message shows, hours included: a constant offset is normal', () => {
		const [first] = feed([[7200, 1000]]);
		expect(first).toMatchObject({ verdict: 'ok', offset: 6200, correctedTime: 1000 });
	});

	it('trap: follows the fastest message, not the average, because queues only add', () => {
		const delays = [0.3, 0.02, 0.5, 0.04, 1.4, 0.03];
		const last = feed(delays.map((delay, k) => [100 + k, 100 + k + delay])).at(-1)!;
		expect(last.offset).toBeCloseTo(-0.02, 9);
	});

	it('trap: one-way stamps cannot tell transit from offset, so the least transit is a setting', () => {
		const rule = { ...DEFAULT_CLOCK_RULE, leastTransit: 0.02 };
		expect(stepClock(startClock(), 100, 100.02, rule).offset).toBeCloseTo(0, 9);
	});

	it('never puts a message after its own arrival', () => {
		const delay = fc.double({ min: 0, max: 5, noNaN: true });
		fc.assert(
			fc.property(fc.array(delay, { minLength: 1, maxLength: 80 }), (delays) => {
				const messages = delays.map((held, k): [number, number] => [k * 0.2 + 50, k * 0.2 + 5 + held]);
				messages.sort((a, b) => a[1] - b[1]);
				feed(messages).forEach(({ correctedTime }, k) => {
					expect(correctedTime).toBeLessThanOrEqual(messages[k]![1]);
				});
			})
		);
	});

	it('leaves the state alone when a stamp is no number', () => {
		const { state } = feed([[10, 10]])[0]!;
		expect(stepClock(state, NaN, 11)).toMatchObject({ state, verdict: 'late' });
	});
});

describe('drift', () => {
	it('trap: old minima expire, so 15 ppm and 200 ppm are followed in both directions', () => {
		for (const ppm of [15, 200, -200]) {
			// Two hours at 2 Hz, every tenth message on an empty network.
			const messages = Array.from({ length: 14_400 }, (_, k): [number, number] => {
				const t = k / 2;
				return [t * (1 + ppm * 1e-6), t + (k % 10 === 0 ? 0.01 : 0.2)];
			});
			const last = feed(messages).at(-1)!;
			expect(last.verdict).toBe('ok');
			expect(Math.abs(last.offset - 7200 * ppm * 1e-6)).toBeLessThan(0.03);
		}
	});

	it('keeps a bounded number of minima', () => {
		// Delays that grow all the time are the worst case: every message could still become the minimum.
		const rising = Array.from({ length: 3000 }, (_, k): [number, number] => [k / 50, k / 50 + k * 1e-5]);
		expect(feed(rising).at(-1)!.state.minima.length).toBeLessThanOrEqual(65);
	});

	it('is allowed for after a long silence', () => {
		const before = feed(steady(0, 20, 0)).at(-1)!.state;
		// An hour away at 200 ppm: 0.72 s, more than would pass as a surprise within the window.
		expect(verdicts(feed(steady(3600, 5, 0.72), before))).toEqual(['ok']);
	});
});

describe('late messages', () => {
	it('trap: a stored batch uploaded after an outage is late, not skewed', () => {
		const before = feed(steady(0, 50, 3)).at(-1)!;
		// 60 s at 5 Hz made during the outage, delivered within a second and a half.
		const batch = Array.from({ length: 300 }, (_, k): [number, number] => [10 + k / 5 + 3, 70 + k / 200]);
		const readings = feed(batch, before.state);
		expect(verdicts(readings.slice(0, 280))).toEqual(['late']);
		expect(readings.map(({ verdict }) => verdict)).not.toContain('stepped');
		expect(readings.at(-1)!.offset).toBeCloseTo(before.offset, 9);
		expect(readings[0]!.correctedTime).toBeCloseTo(10 + 0.02, 9);
	});

	it('live messages after the batch are on time again, and a slower clock is believed once it has been heard for a while', () => {
		const before = feed(steady(0, 50, 3)).at(-1)!.state;
		const batch = Array.from({ length: 300 }, (_, k): [number, number] => [10 + k / 5 + 3, 70 + k / 200]);
		const after = feed([...batch, ...steady(72, 75, 2.9)], before);
		expect(verdicts(after.slice(300))).toEqual(['ok']);
		expect(after.at(-1)!.offset).toBeCloseTo(2.88, 9);
	});

	it('a slow upload, one and a half times as fast as it was made, is still late', () => {
		const before = feed(steady(0, 50, 0)).at(-1)!.state;
		const batch = Array.from({ length: 200 }, (_, k): [number, number] => [10 + k / 5, 70 + k / 7.5]);
		expect(verdicts(feed(batch, before))).toEqual(['late']);
	});

	it('one delayed message changes nothing', () => {
		const readings = feed([...steady(0, 20, 0), [4, 9], ...steady(9, 20, 0)]);
		expect(readings[20]!.verdict).toBe('late');
		expect(readings.at(-1)!.offset).toBeCloseTo(-0.02, 9);
	});

	it('a clock set back is believed after five messages over three seconds that agree', () => {
		const before = feed(steady(0, 50, 0)).at(-1)!.state;
		const readings = feed(steady(10, 20, -30), before);
		const stepped = readings.findIndex(({ verdict }) => verdict === 'stepped');
		expect(stepped).toBe(15);
		expect(verdicts(readings.slice(0, stepped))).toEqual(['late']);
		expect(verdicts(readings.slice(stepped + 1))).toEqual(['ok']);
		expect(readings.at(-1)!.offset).toBeCloseTo(-30.02, 9);
		expect(readings.at(-1)!.correctedTime).toBeCloseTo(10 + 19 / 5 + 0.02, 9);
	});

	it('a stray before the step does not hold it up for long', () => {
		const before = feed(steady(0, 50, 0)).at(-1)!.state;
		const readings = feed([[10 - 3, 10], ...steady(10.2, 30, -30)], before);
		expect(readings.map(({ verdict }) => verdict)).toContain('stepped');
	});
});

describe('messages from the future', () => {
	it('one rogue stamp is refused and forgotten', () => {
		const readings = feed([...steady(0, 20, 0), [3604, 4.02], ...steady(4.2, 20, 0)]);
		expect(readings[20]!.verdict).toBe('future');
		expect(readings[20]!.correctedTime).toBeLessThanOrEqual(4.02);
		expect(verdicts(readings.slice(21))).toEqual(['ok']);
		expect(readings.at(-1)!.offset).toBeCloseTo(-0.02, 9);
	});

	it('stamps that do not agree with each other are never believed', () => {
		const before = feed(steady(0, 20, 0)).at(-1)!.state;
		const rogue = Array.from({ length: 40 }, (_, k): [number, number] => [4 + k / 5 + 10 + 7 * k, 4 + k / 5]);
		expect(verdicts(feed(rogue, before))).toEqual(['future']);
	});

	it('a clock set ahead is believed after five messages over a second that agree', () => {
		const before = feed(steady(0, 50, 0)).at(-1)!.state;
		const readings = feed(steady(10, 20, 3600), before);
		const stepped = readings.findIndex(({ verdict }) => verdict === 'stepped');
		expect(stepped).toBe(5);
		expect(verdicts(readings.slice(0, stepped))).toEqual(['future']);
		expect(verdicts(readings.slice(stepped + 1))).toEqual(['ok']);
		expect(readings.at(-1)!.offset).toBeCloseTo(3599.98, 9);
	});

	it('a burst within a second is not enough', () => {
		const before = feed(steady(0, 50, 0)).at(-1)!.state;
		expect(verdicts(feed(steady(10, 18, 3600, 0.02, 20), before))).toEqual(['future']);
	});
});
