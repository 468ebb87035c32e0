import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { compareRates } from './rate-ratio.ts';

const compare = (x1: number, t1: number, x2: number, t2: number, nullRatio = 1, confidence = 0.95) =>
	compareRates({ count: x1, exposure: t1 }, { count: x2, exposure: t2 }, { nullRatio, confidence });

const count = fc.oneof(fc.nat(5), fc.nat(80));
const hours = fc.double({ min: 0.1, max: 1000, noNaN: true });

describe('compareRates', () => {
	it('reproduces 2/17877 against 9/16660: p 0.05011, ratio 0.2070941557 (0.02177406, 1.00054910) (Fay, rateratio.test vignette)', () => {
		const { ratio, central } = compare(2, 17877, 9, 16660);
		expect(ratio).toBeCloseTo(0.2070941557, 10);
		expect(central.p).toBeCloseTo(0.05011, 5);
		expect(central.lower).toBeCloseTo(0.02177406, 8);
		expect(central.upper).toBeCloseTo(1.0005491, 7);
	});

	it('trap "p-value and interval from one method": minimum likelihood rejects where the exact interval holds 1 (Fay, exactci vignette)', () => {
		const { minLikelihoodP, central } = compare(2, 17877, 10, 20000);
		expect(minLikelihoodP).toBeCloseTo(0.042, 3);
		expect(central.lower).toBeCloseTo(0.024, 3);
		expect(central.upper).toBeCloseTo(1.05, 2);
		expect(central.p).toBeGreaterThan(0.05);
	});

	it('agrees with its own interval, for both tests, whatever the data', () => {
		fc.assert(
			fc.property(count, hours, count, hours, (x1, t1, x2, t2) => {
				const { central, midP } = compare(x1, t1, x2, t2);
				for (const { p, lower, upper } of [central, midP]) {
					if (p < 0.05 - 1e-9) expect(lower > 1 || upper < 1).toBe(true);
					if (p > 0.05 + 1e-9) expect(lower <= 1 && upper >= 1).toBe(true);
				}
			})
		);
	});

	it('trap "zero counts": no Wald interval, and the ratio is bounded on one side only', () => {
		const none = compare(0, 50, 4, 50);
		expect(none).toMatchObject({ ratio: 0, wald: null, central: { lower: 0 } });
		expect(none.central.upper).toBeGreaterThan(1);
		const all = compare(5, 40, 0, 60);
		expect(all).toMatchObject({ ratio: Infinity, wald: null, central: { upper: Infinity } });
		expect(all.central.lower).toBeGreaterThan(1);
	});

	it('trap "0 vs 0 says nothing": p 1 and every ratio possible', () => {
		const { ratio, central, midP, minLikelihoodP, wald } = compare(0, 100, 0, 100);
		expect({ ratio, central, midP, minLikelihoodP, wald }).toEqual({
			ratio: null,
			central: { p: 1, lower: 0, upper: Infinity },
			midP: { p: 1, lower: 0, upper: Infinity },
			minLikelihoodP: 1,
			wald: null
		});
	});

	it('says nothing when an arm has no exposure', () => {
		expect(compare(0, 0, 7, 10)).toMatchObject({ ratio: null, nullShare: null, central: { p: 1, upper: Infinity } });
	});

	it('is undone by swapping the arms', () => {
		fc.assert(
			fc.property(count, hours, count, hours, (x1, t1, x2, t2) => {
				const there = compare(x1, t1, x2, t2);
				const back = compare(x2, t2, x1, t1);
				expect(back.central.p).toBeCloseTo(there.central.p, 9);
				expect(back.midP.p).toBeCloseTo(there.midP.p, 9);
				const inverse = 1 / there.central.upper;
				if (Number.isFinite(inverse)) expect(Math.abs(back.central.lower - inverse)).toBeLessThan(1e-7 * (1 + inverse));
				if (there.ratio !== null) expect(back.ratio! * there.ratio).not.toBeLessThan(0);
			})
		);
	});

	it('contains its ratio and does not care for the unit of time', () => {
		fc.assert(
			fc.property(count, hours, count, hours, (x1, t1, x2, t2) => {
				const perHour = compare(x1, t1, x2, t2);
				const perMinute = compare(x1, t1 * 60, x2, t2 * 60);
				expect(perMinute.central.p).toBeCloseTo(perHour.central.p, 9);
				if (perHour.ratio === null) return;
				for (const { lower, upper } of [perHour.central, perHour.midP]) {
					expect(lower).toBeLessThanOrEqual(perHour.ratio);
					expect(upper).toBeGreaterThanOrEqual(perHour.ratio);
				}
			})
		);
	});

	it('tests against another ratio: p is 1 or near it at the ratio observed', () => {
		expect(compare(20, 100, 10, 100, 2).central.p).toBeGreaterThan(0.99);
		expect(compare(20, 100, 10, 100, 6).central.p).toBeLessThan(0.05);
	});

	it('refuses what cannot be counts or hours', () => {
		expect(() => compare(1.2, 1, 1, 1)).toThrow(Failure);
		expect(() => compare(1, 0, 1, 1)).toThrow(Failure);
		expect(() => compare(1, 1, 1, 1, 0)).toThrow(Failure);
		expect(() => compare(1, 1, 1, 1, 1, 1)).toThrow(Failure);
	});
});
