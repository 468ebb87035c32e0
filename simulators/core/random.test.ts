import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createRandom } from './random.ts';

const draws = (seed: number | string, count = 5) => {
	const random = createRandom(seed);
	return Array.from({ length: count }, () => random.next());
};

describe('createRandom', () => {
	it('gives the same numbers for the same seed and others for another', () => {
		expect(draws(7)).toEqual(draws(7));
		expect(draws(7)).not.toEqual(draws(8));
	});

	it('forks streams that do not depend on how far the parent has got', () => {
		const early = createRandom(3).fork('robot').next();
		const parent = createRandom(3);
		for (let i = 0; i < 100; i++) parent.next();
		expect(parent.fork('robot').next()).toBe(early);
		expect(createRandom(3).fork('other').next()).not.toBe(early);
	});

	it('is uniform: ten bins of 20,000 draws pass a χ² test at 0.1 % (quantile 27.88 at 9 degrees, common tables)', () => {
		const bins = new Array<number>(10).fill(0);
		for (const value of draws('bins', 20_000)) bins[Math.floor(value * 10)]!++;
		const chi2 = bins.reduce((sum, n) => sum + (n - 2000) ** 2 / 2000, 0);
		expect(chi2).toBeLessThan(27.88);
	});

	it('draws normal, exponential and Poisson numbers of the right mean', () => {
		const random = createRandom(11);
		const mean = (draw: () => number) => Array.from({ length: 20_000 }, draw).reduce((a, b) => a + b, 0) / 20_000;
		// Five standard errors of the mean.
		expect(Math.abs(mean(() => random.normal(1.34, 0.26)) - 1.34)).toBeLessThan((5 * 0.26) / Math.sqrt(20_000));
		expect(Math.abs(mean(() => random.exponential(4)) - 4)).toBeLessThan((5 * 4) / Math.sqrt(20_000));
		expect(Math.abs(mean(() => random.poisson(45)) - 45)).toBeLessThan(5 * Math.sqrt(45 / 20_000));
	});

	it('never draws an item of weight zero', () => {
		const weights = fc.array(fc.constantFrom(0, 1, 2.5), { minLength: 1, maxLength: 6 });
		fc.assert(
			fc.property(weights, fc.integer(), (list, seed) => {
				const index = createRandom(seed).weighted(list);
				if (list.every((weight) => weight === 0)) expect(index).toBe(-1);
				else expect(list[index]).toBeGreaterThan(0);
			})
		);
	});
});
