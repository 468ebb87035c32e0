import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { computeQuantile, computeQuantileRanks, computeQuantiles } from './quantile.ts';

describe('computeQuantiles', () => {
	it('interpolates at (n − 1)·p: 1 to 10 give 3.25, 5.5, 7.75 and 9.1 (type 7 of Hyndman & Fan 1996, from memory)', () => {
		const oneToTen = [10, 1, 9, 2, 8, 3, 7, 4, 6, 5];
		expect(computeQuantiles(oneToTen, [0, 0.25, 0.5, 0.75, 0.9, 1])).toEqual([
			1,
			3.25,
			5.5,
			7.75,
			expect.closeTo(9.1, 12),
			10
		]);
	});

	it('has no quantile of nothing, and does not count what was not measured', () => {
		expect(computeQuantiles([], [0.5, 0.9])).toEqual([null, null]);
		expect(computeQuantile([NaN, NaN], 0.5)).toBeNull();
		expect(computeQuantile([NaN, 4, 2], 0.5)).toBe(3);
	});

	it('trap "infinite times to collision": stays in order instead of NaN', () => {
		expect(computeQuantiles([1, Infinity, Infinity], [0, 0.25, 0.75, 1])).toEqual([1, Infinity, Infinity, Infinity]);
	});

	it('sorts by size, not by digits, and keeps the input', () => {
		const values = [100, 9, 20];
		expect(computeQuantile(values, 0.5)).toBe(20);
		expect(values).toEqual([100, 9, 20]);
	});

	it('refuses shares outside 0 to 1', () => {
		for (const share of [-0.1, 1.1, NaN]) expect(() => computeQuantile([1, 2], share)).toThrow(Failure);
	});

	it('rises with the share, stays within the sample and does not care for its order', () => {
		const sample = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 1, maxLength: 60 });
		const share = fc.double({ min: 0, max: 1, noNaN: true });
		fc.assert(
			fc.property(sample, share, share, (values, a, b) => {
				const [low, high] = computeQuantiles(values, [Math.min(a, b), Math.max(a, b)]);
				expect(low).toBeLessThanOrEqual(high! + 1e-9);
				expect(low).toBeGreaterThanOrEqual(Math.min(...values));
				expect(high).toBeLessThanOrEqual(Math.max(...values));
				expect(computeQuantile([...values].reverse(), a)).toBe(computeQuantile(values, a));
			})
		);
	});
});

describe('computeQuantileRanks', () => {
	it('bounds the median of 10 by the 2nd and 9th value with 97.85 % (David & Nagaraja 2003, from memory)', () => {
		expect(computeQuantileRanks(10, 0.5)).toEqual({
			lowerRank: 2,
			upperRank: 9,
			coverage: expect.closeTo(1002 / 1024, 12)
		});
	});

	it('says when the sample is too small to bound a side', () => {
		expect(computeQuantileRanks(5, 0.5)).toMatchObject({ lowerRank: null, upperRank: null });
		expect(computeQuantileRanks(30, 0.95)).toMatchObject({ lowerRank: expect.any(Number), upperRank: null });
		expect(computeQuantileRanks(0, 0.5)).toMatchObject({ lowerRank: null, upperRank: null });
		expect(() => computeQuantileRanks(10, 1)).toThrow(Failure);
	});

	it('covers at least the level, with the quantile itself between the ranks', () => {
		const share = fc.double({ min: 0.02, max: 0.98, noNaN: true });
		fc.assert(
			fc.property(
				fc.integer({ min: 1, max: 600 }),
				share,
				fc.double({ min: 0.5, max: 0.99, noNaN: true }),
				(n, p, level) => {
					const { lowerRank, upperRank, coverage } = computeQuantileRanks(n, p, level);
					expect(coverage).toBeGreaterThanOrEqual(level - 1e-9);
					expect(lowerRank ?? 0).toBeLessThanOrEqual(n * p + 1);
					expect(upperRank ?? n + 1).toBeGreaterThanOrEqual(n * p);
				}
			)
		);
	});
});
