import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { computeEventsNeeded, computeExactPower, computeHours } from './exposure.ts';

describe('computeEventsNeeded', () => {
	it('needs 49.0 events by the log form and 49.8 exactly to see a halving with 80 % (table of the reference pack, topic 7)', () => {
		const { logFormula, exactCentral, exactMidP } = computeEventsNeeded({ rateRatio: 0.5 });
		expect(logFormula).toBeCloseTo(49.0, 1);
		expect(exactCentral).toBeCloseTo(49.8, 1);
		expect(exactMidP).toBeCloseTo(46.2, 1);
		expect(computeHours(exactCentral!, 0.1)).toBeCloseTo(498, 0);
	});

	it('reaches the wanted power exactly where it says', () => {
		for (const plan of [
			{ rateRatio: 2, power: 0.9 },
			{ rateRatio: 0.67, power: 0.8, exposureRatio: 2 },
			{ rateRatio: 4, power: 0.8, alpha: 0.1 }
		]) {
			const { exactCentral, exactMidP } = computeEventsNeeded(plan);
			expect(computeExactPower(exactCentral!, plan).central).toBeCloseTo(plan.power, 9);
			expect(computeExactPower(exactMidP!, plan).midP).toBeCloseTo(plan.power, 9);
		}
	});

	it('trap "unequal arms": with twice the hours in the new arm the log form reaches 0.751 where 0.8 was asked', () => {
		const plan = { rateRatio: 0.5, power: 0.8, exposureRatio: 2 };
		expect(computeExactPower(computeEventsNeeded(plan).logFormula, plan).central).toBeCloseTo(0.751, 3);
	});

	it('says that no exposure shows a difference where there is none, and no hours suffice without events', () => {
		expect(computeEventsNeeded({ rateRatio: 1 })).toEqual({
			logFormula: Infinity,
			sqrtFormula: Infinity,
			exactCentral: Infinity,
			exactMidP: Infinity
		});
		expect(computeHours(20, 0)).toBe(Infinity);
	});

	it('leaves the exact sum undone where it would take too long', () => {
		const { logFormula, exactCentral, exactMidP } = computeEventsNeeded({ rateRatio: 1.02 });
		expect(logFormula).toBeGreaterThan(30_000);
		expect([exactCentral, exactMidP]).toEqual([null, null]);
	});

	it('refuses impossible plans', () => {
		expect(() => computeEventsNeeded({ rateRatio: 0 })).toThrow(Failure);
		expect(() => computeEventsNeeded({ rateRatio: NaN })).toThrow(Failure);
		expect(() => computeEventsNeeded({ rateRatio: 2, power: 1 })).toThrow(Failure);
		expect(() => computeEventsNeeded({ rateRatio: 2, alpha: 0 })).toThrow(Failure);
		expect(() => computeEventsNeeded({ rateRatio: 2, exposureRatio: 0 })).toThrow(Failure);
		expect(() => computeHours(3, -1)).toThrow(Failure);
	});
});

describe('computeExactPower', () => {
	it('never rejects without events, and keeps the size of the central test below alpha', () => {
		expect(computeExactPower(0, { rateRatio: 3 })).toEqual({ central: 0, midP: 0 });
		fc.assert(
			fc.property(
				fc.double({ min: 0.1, max: 60, noNaN: true }),
				fc.constantFrom(0.5, 1, 2),
				fc.constantFrom(0.01, 0.05, 0.1),
				(events, exposureRatio, alpha) => {
					const { central, midP } = computeExactPower(events, { rateRatio: 1, exposureRatio, alpha });
					expect(central).toBeLessThanOrEqual(alpha);
					expect(midP).toBeGreaterThanOrEqual(central);
				}
			),
			{ numRuns: 40 }
		);
	});

	it('is the same whichever arm is called new', () => {
		fc.assert(
			fc.property(
				fc.double({ min: 1, max: 40, noNaN: true }),
				fc.double({ min: 0.3, max: 3, noNaN: true }),
				fc.constantFrom(0.5, 1, 2),
				(events, rateRatio, exposureRatio) => {
					const there = computeExactPower(events, { rateRatio, exposureRatio });
					const swapped = { rateRatio: 1 / rateRatio, exposureRatio: 1 / exposureRatio };
					const back = computeExactPower(events * rateRatio * exposureRatio, swapped);
					expect(back.central).toBeCloseTo(there.central, 9);
				}
			),
			{ numRuns: 40 }
		);
	});

	it('grows with the events expected', () => {
		const power = [5, 10, 20, 40, 80].map((events) => computeExactPower(events, { rateRatio: 2 }).central);
		expect(power).toEqual([...power].sort((a, b) => a - b));
		expect(power[4]).toBeGreaterThan(0.99);
	});
});
