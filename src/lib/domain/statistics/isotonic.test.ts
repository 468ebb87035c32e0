import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { fitIsotonic, fitIsotonicRates } from './isotonic.ts';

describe('fitIsotonic', () => {
	it('pools the example in the documentation of isoreg (from memory)', () => {
		expect(Array.from(fitIsotonic([1, 0, 4, 3, 3, 5, 4, 2, 0]))).toEqual([0.5, 0.5, 3, 3, 3, 3, 3, 3, 3]);
	});

	it('keeps the input, and has no fit for nothing', () => {
		const values = [3, 1];
		expect(Array.from(fitIsotonic(values))).toEqual([2, 2]);
		expect(values).toEqual([3, 1]);
		expect(fitIsotonic([])).toHaveLength(0);
		expect(() => fitIsotonic([1, NaN])).toThrow(Failure);
	});

	it('never falls, keeps the sum, and is at least as close as any other rising curve', () => {
		const value = fc.integer({ min: -50, max: 50 });
		fc.assert(
			fc.property(
				fc.array(value, { minLength: 1, maxLength: 30 }),
				fc.array(value, { minLength: 30, maxLength: 30 }),
				(y, other) => {
					const fit = fitIsotonic(y);
					const rival = other.slice(0, y.length).sort((a, b) => a - b);
					const distance = (curve: ArrayLike<number>) => y.reduce((sum, v, i) => sum + (v - curve[i]!) ** 2, 0);
					for (let i = 1; i < fit.length; i++) expect(fit[i]).toBeGreaterThanOrEqual(fit[i - 1]! - 1e-9);
					expect(fit.reduce((a, b) => a + b, 0)).toBeCloseTo(
						y.reduce((a, b) => a + b, 0),
						8
					);
					expect(distance(fit)).toBeLessThanOrEqual(distance(rival) + 1e-8);
				}
			)
		);
	});
});

describe('fitIsotonicRates', () => {
	it('trap "pool band rates as Σcounts/Σhours, not mean of rates"', () => {
		const { raw, fit, expectedTotal } = fitIsotonicRates([6, 4, 9, 7, 15, 3], [60, 50, 40, 40, 20, 10]);
		expect(raw).toEqual([0.1, 0.08, 0.225, 0.175, 0.75, 0.3]);
		expect(fit).toEqual([10 / 110, 10 / 110, 16 / 80, 16 / 80, 18 / 30, 18 / 30]);
		expect(fit[0]).not.toBeCloseTo((0.1 + 0.08) / 2, 4);
		expect(expectedTotal).toBeCloseTo(44, 12);
	});

	it('leaves a band nobody drove in without a rate, and does not count it as 0', () => {
		const { raw, fit } = fitIsotonicRates([4, 0, 2], [10, 0, 10]);
		expect(raw).toEqual([0.4, null, 0.2]);
		expect(fit).toEqual([0.3, null, 0.3]);
		expect(() => fitIsotonicRates([4, 1], [10, 0])).toThrow(Failure);
		expect(() => fitIsotonicRates([4], [10, 1])).toThrow(Failure);
	});

	it('expects as many events as there were; the unit of time scales the rates', () => {
		const band = fc.tuple(fc.nat(40), fc.double({ min: 0.1, max: 90, noNaN: true }));
		fc.assert(
			fc.property(fc.array(band, { maxLength: 12 }), (bands) => {
				const counts = bands.map(([count]) => count);
				const perHour = fitIsotonicRates(
					counts,
					bands.map(([, hours]) => hours)
				);
				const perDay = fitIsotonicRates(
					counts,
					bands.map(([, hours]) => hours / 24)
				);
				expect(perHour.expectedTotal).toBeCloseTo(
					counts.reduce((a, b) => a + b, 0),
					7
				);
				perHour.fit.forEach((rate, i) => {
					expect(Math.abs(perDay.fit[i]! - rate! * 24)).toBeLessThanOrEqual(1e-9 * (1 + perDay.fit[i]!));
				});
			})
		);
	});
});
