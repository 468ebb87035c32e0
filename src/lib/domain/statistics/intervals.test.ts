import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import {
	computeClopperPearsonInterval,
	computeGarwoodInterval,
	computeMidPInterval,
	computeWilsonInterval
} from './intervals.ts';

const counts = fc.oneof(fc.nat(30), fc.nat(5000));
const hours = fc.double({ min: 1e-3, max: 1e5, noNaN: true });
const level = fc.double({ min: 0.5, max: 0.999, noNaN: true });

describe('Poisson intervals', () => {
	it('bound a rate without events by 3.688879 over the exposure, and by 2.995732 one-sided (Garwood 1936)', () => {
		expect(computeGarwoodInterval(0, 1).upper).toBeCloseTo(3.688879, 6);
		expect(computeGarwoodInterval(0, 12.5).upper).toBeCloseTo(3.688879 / 12.5, 6);
		expect(computeGarwoodInterval(0, 1, 0.9).upper).toBeCloseTo(2.995732, 6);
	});

	it('give the tabled 95 % limits for 1, 10 and 100 events (Garwood 1936, from memory)', () => {
		expect(computeGarwoodInterval(1, 1)).toMatchObject({
			lower: expect.closeTo(0.0253, 4),
			upper: expect.closeTo(5.5716, 4)
		});
		expect(computeGarwoodInterval(10, 1)).toMatchObject({
			lower: expect.closeTo(4.7954, 4),
			upper: expect.closeTo(18.3904, 4)
		});
		expect(computeGarwoodInterval(100, 1)).toMatchObject({
			lower: expect.closeTo(81.364, 3),
			upper: expect.closeTo(121.6269, 3)
		});
	});

	it('trap "zero counts": no events are never 0 ± 0', () => {
		for (const interval of [computeGarwoodInterval(0, 40), computeMidPInterval(0, 40)]) {
			expect(interval.estimate).toBe(0);
			expect(interval.lower).toBe(0);
			expect(interval.upper).toBeGreaterThan(0.07);
		}
	});

	it('say that nothing is known without exposure', () => {
		const nothing = { estimate: null, lower: 0, upper: Infinity };
		expect(computeGarwoodInterval(0, 0)).toEqual(nothing);
		expect(computeMidPInterval(0, 0)).toEqual(nothing);
	});

	it('refuse input that cannot be a rate', () => {
		const wrong: [number, number, number?][] = [
			[-1, 1],
			[1.5, 1],
			[NaN, 1],
			[1, -1],
			[1, NaN],
			[1, Infinity],
			[1, 0],
			[1, 1, 0],
			[1, 1, 1],
			[1, 1, NaN]
		];
		for (const [count, exposure, confidence] of wrong) {
			expect(() => computeGarwoodInterval(count, exposure, confidence)).toThrow(Failure);
		}
	});

	it('contain their estimate; mid-p lies within exact', () => {
		fc.assert(
			fc.property(counts, hours, level, (count, exposure, confidence) => {
				const exact = computeGarwoodInterval(count, exposure, confidence);
				const mid = computeMidPInterval(count, exposure, confidence);
				expect(mid.lower).toBeLessThanOrEqual(exact.estimate!);
				expect(mid.upper).toBeGreaterThanOrEqual(exact.estimate!);
				expect(exact.lower).toBeLessThanOrEqual(mid.lower * (1 + 1e-9));
				expect(exact.upper).toBeGreaterThanOrEqual(mid.upper * (1 - 1e-9));
			})
		);
	});

	it('rise with the count and widen with the confidence', () => {
		fc.assert(
			fc.property(counts, level, level, (count, a, b) => {
				const [less, more] = a < b ? [a, b] : [b, a];
				const here = computeGarwoodInterval(count, 1, less);
				const next = computeGarwoodInterval(count + 1, 1, less);
				const wider = computeGarwoodInterval(count, 1, more);
				expect(next.lower).toBeGreaterThan(here.lower);
				expect(next.upper).toBeGreaterThan(here.upper);
				expect(wider.lower).toBeLessThanOrEqual(here.lower * (1 + 1e-10));
				expect(wider.upper).toBeGreaterThanOrEqual(here.upper * (1 - 1e-10));
			})
		);
	});

	it('scale with the unit of time: per second is per hour over 3600', () => {
		fc.assert(
			fc.property(counts, hours, (count, exposure) => {
				const perHour = computeGarwoodInterval(count, exposure);
				const perSecond = computeGarwoodInterval(count, exposure * 3600);
				expect(perSecond.upper * 3600).toBeCloseTo(perHour.upper, 8 - Math.ceil(Math.log10(1 + perHour.upper)));
				expect(perSecond.lower * 3600).toBeCloseTo(perHour.lower, 8 - Math.ceil(Math.log10(1 + perHour.lower)));
			})
		);
	});
});

describe('intervals of a share', () => {
	it('give (0.0624, 0.1605) for 15 of 148 (Newcombe 1998, from memory)', () => {
		const { lower, upper } = computeWilsonInterval(15, 148);
		expect(lower).toBeCloseTo(0.0624, 4);
		expect(upper).toBeCloseTo(0.1605, 4);
	});

	it('end exactly at 0 and 1 when none or all are events', () => {
		for (const compute of [computeWilsonInterval, computeClopperPearsonInterval]) {
			expect(compute(0, 10).lower).toBe(0);
			expect(compute(10, 10).upper).toBe(1);
			expect(compute(0, 10).upper).toBeGreaterThan(0.2);
		}
	});

	it('say that nothing is known without trials', () => {
		expect(computeWilsonInterval(0, 0)).toEqual({ estimate: null, lower: 0, upper: 1 });
		expect(computeClopperPearsonInterval(0, 0)).toEqual({ estimate: null, lower: 0, upper: 1 });
	});

	it('refuse more events than trials and what is not whole', () => {
		for (const [events, trials] of [
			[3, 2],
			[0.5, 2],
			[-1, 2],
			[0, NaN]
		] as const) {
			expect(() => computeWilsonInterval(events, trials)).toThrow(Failure);
			expect(() => computeClopperPearsonInterval(events, trials)).toThrow(Failure);
		}
	});

	it('contain the share and mirror when events and non-events are swapped', () => {
		fc.assert(
			fc.property(fc.nat(400), fc.nat(400), level, (events, rest, confidence) => {
				fc.pre(events + rest > 0);
				for (const compute of [computeWilsonInterval, computeClopperPearsonInterval]) {
					const { estimate, lower, upper } = compute(events, events + rest, confidence);
					const swapped = compute(rest, events + rest, confidence);
					expect(lower).toBeLessThanOrEqual(estimate!);
					expect(upper).toBeGreaterThanOrEqual(estimate!);
					expect(swapped.lower).toBeCloseTo(1 - upper, 9);
					expect(swapped.upper).toBeCloseTo(1 - lower, 9);
				}
			})
		);
	});
});
