import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	binomialAtLeast,
	binomialAtMost,
	binomialMass,
	chiSquareAbove,
	gammaTails,
	normalTwoSided,
	poissonAtLeast,
	poissonAtMost,
	poissonMass,
	studentTwoSided
} from './distributions.ts';
import { findRoot, searchOutward } from './root.ts';

describe('published table values (common statistical tables, from memory)', () => {
	it('gives 5 % above 3.841 for χ² with 1 and above 18.307 with 10 degrees of freedom', () => {
		expect(chiSquareAbove(3.841459, 1)).toBeCloseTo(0.05, 7);
		expect(chiSquareAbove(18.307038, 10)).toBeCloseTo(0.05, 7);
	});

	it('gives 5 % outside ±1.96 for the normal and outside ±2.776 for t with 4 degrees of freedom', () => {
		expect(normalTwoSided(1.959964)).toBeCloseTo(0.05, 7);
		expect(studentTwoSided(-2.776445, 4)).toBeCloseTo(0.05, 7);
	});
});

describe('tails', () => {
	it('keep their digits far out, where one minus the other tail would be 0', () => {
		expect(chiSquareAbove(400, 1)).toBeGreaterThan(0);
		expect(poissonAtLeast(200, 10) / poissonMass(200, 10)).toBeGreaterThan(1);
		expect(binomialAtLeast(300, 300, 0.01)).toBeCloseTo(0, 12);
		expect(binomialAtLeast(150, 150, 0.01) / 1e-300).toBeCloseTo(1, 6);
	});

	it('hold near a shape of 1000, where sums of masses say the same', () => {
		let sum = 0;
		for (let k = 0; k <= 1000; k++) sum += poissonMass(k, 1030);
		expect(poissonAtMost(1000, 1030)).toBeCloseTo(sum, 11);
	});

	it('are the sums of the masses (Poisson and binomial)', () => {
		fc.assert(
			fc.property(fc.nat(60), fc.double({ min: 0.01, max: 60, noNaN: true }), fc.nat(40), (count, mean, more) => {
				let poisson = 0;
				for (let k = 0; k <= count; k++) poisson += poissonMass(k, mean);
				expect(poissonAtMost(count, mean)).toBeCloseTo(poisson, 10);
				expect(poissonAtMost(count, mean) + poissonAtLeast(count + 1, mean)).toBeCloseTo(1, 12);
				const share = mean / 61;
				let binomial = 0;
				for (let k = 0; k <= count; k++) binomial += binomialMass(k, count + more, share);
				expect(binomialAtMost(count, count + more, share)).toBeCloseTo(binomial, 10);
				expect(
					binomialAtMost(count, count + more, share) + binomialAtLeast(count + 1, count + more, share)
				).toBeCloseTo(1, 12);
			})
		);
	});

	it('never rise with the mean (P at most) nor fall with x (lower gamma)', () => {
		const positive = fc.double({ min: 1e-3, max: 3000, noNaN: true });
		fc.assert(
			fc.property(fc.nat(2000), positive, positive, (count, a, b) => {
				const [low, high] = a < b ? [a, b] : [b, a];
				expect(poissonAtMost(count, high)).toBeLessThanOrEqual(poissonAtMost(count, low) + 1e-12);
				expect(gammaTails(count + 0.5, high).lower).toBeGreaterThanOrEqual(gammaTails(count + 0.5, low).lower - 1e-12);
			})
		);
	});

	it('answer at the ends: nothing at or below 0, everything below Infinity', () => {
		expect(gammaTails(3, 0)).toEqual({ lower: 0, upper: 1 });
		expect(gammaTails(3, Infinity)).toEqual({ lower: 1, upper: 0 });
		expect(poissonAtMost(-1, 2)).toBe(0);
		expect(poissonMass(0, 0)).toBe(1);
		expect(poissonMass(1, 0)).toBe(0);
	});
});

describe('findRoot', () => {
	it('finds a crossing anywhere in the bracket to the last few bits', () => {
		fc.assert(
			fc.property(fc.double({ min: -50, max: 50, noNaN: true }), (root) => {
				const found = findRoot((x) => Math.expm1((x - root) / 7), -60, 70);
				expect(Math.abs(found - root)).toBeLessThan(1e-13 * Math.max(1, Math.abs(root)));
			})
		);
	});

	it('answers the end nearer to zero when there is no crossing', () => {
		expect(findRoot((x) => x + 1, 0, 1)).toBe(0);
	});

	it('is bracketed by a search that gives up with null rather than loop', () => {
		expect(searchOutward((x) => 5 - x, 0, 1)).toBe(8);
		expect(searchOutward((x) => 5 + x, 0, -1)).toBe(-8);
		expect(searchOutward(() => 1, 0, 1)).toBeNull();
		expect(searchOutward(() => NaN, 0, 1)).toBeNull();
	});
});
