import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { computeClusterRobust } from './cluster-robust.ts';
import { flattenDesign } from './count-data.ts';
import {
	computeWaldInterval,
	computeWidenedInterval,
	fitPoisson,
	predictRate,
	testAgainstCommonRate,
	testCoefficients,
	type PoissonFit
} from './glm.ts';
import { computeProfileInterval } from './profile.ts';

const fitted = (counts: number[], exposures: number[], rows: number[][]): PoissonFit => {
	const fit = fitPoisson({ counts, exposures, ...flattenDesign(rows) });
	if (fit.kind === 'none') throw new Error(fit.reason);
	return fit;
};
const reasonOf = (counts: number[], exposures: number[], rows: number[][]) => {
	const fit = fitPoisson({ counts, exposures, ...flattenDesign(rows) });
	return fit.kind === 'none' ? fit.reason : null;
};

/** Mid densities of six bands, persons/m². */
const BANDS = [0.1, 0.3, 0.55, 0.9, 1.6, 2.6];
const withOnes = (values: number[]) => values.map((value) => [1, value]);
const lengthOf = ({ lower, upper }: { lower: number; upper: number }) => upper - lower;

describe('fitPoisson', () => {
	it('reproduces the randomised trial of Dobson (1990, An Introduction to Generalized Linear Models; from memory)', () => {
		const counts = [18, 17, 15, 20, 10, 20, 25, 13, 12];
		const rows = counts.map((_, i) => [1, +(i % 3 === 1), +(i % 3 === 2), +(i >= 3 && i < 6), +(i >= 6)]);
		const fit = fitted(counts, new Array(9).fill(1), rows);
		const [intercept, second, third] = testCoefficients(fit);
		expect(intercept).toMatchObject({ estimate: expect.closeTo(3.0445, 4), standardError: expect.closeTo(0.1709, 4) });
		expect(second).toMatchObject({ estimate: expect.closeTo(-0.4543, 4), standardError: expect.closeTo(0.2022, 4) });
		expect(third).toMatchObject({ estimate: expect.closeTo(-0.293, 4), z: expect.closeTo(-1.52, 2) });
		expect(fit.deviance).toBeCloseTo(5.1291, 4);
		expect(fit.nullDeviance).toBeCloseTo(10.5814, 4);
		expect(fit.aic).toBeCloseTo(56.76, 2);
		expect(fit.df).toBe(4);
	});

	it('gives the logarithm of Σcounts/Σhours for the intercept alone', () => {
		const fit = fitted([3, 0, 9], [10, 2, 30], [[1], [1], [1]]);
		expect(fit.coefficients[0]).toBeCloseTo(Math.log(12 / 42), 12);
		expect(testAgainstCommonRate(fit)).toEqual({ chi2: 0, df: 0, p: null });
		expect(predictRate(fit, [1]).rate).toBeCloseTo(12 / 42, 12);
	});

	const rowsArbitrary = fc.array(
		fc.record({
			y: fc.nat(12),
			t: fc.double({ min: 0.2, max: 8, noNaN: true }),
			d: fc.double({ min: 0, max: 3, noNaN: true })
		}),
		{ minLength: 6, maxLength: 25 }
	);
	const spreadEnough = (rows: { y: number; d: number }[]) =>
		Math.max(...rows.filter(({ y }) => y > 0).map(({ d }) => d)) -
			Math.min(...rows.filter(({ y }) => y > 0).map(({ d }) => d)) >
		0.3;

	it('does not care for the order of rows, and the unit of time moves only the intercept', () => {
		fc.assert(
			fc.property(rowsArbitrary, (rows) => {
				fc.pre(spreadEnough(rows));
				const fit = fitted(
					rows.map(({ y }) => y),
					rows.map(({ t }) => t),
					withOnes(rows.map(({ d }) => d))
				);
				const turned = [...rows].reverse();
				const again = fitted(
					turned.map(({ y }) => y),
					turned.map(({ t }) => t * 3600),
					withOnes(turned.map(({ d }) => d))
				);
				expect(again.coefficients[1]).toBeCloseTo(fit.coefficients[1]!, 7);
				expect(again.coefficients[0]! + Math.log(3600)).toBeCloseTo(fit.coefficients[0]!, 7);
				expect(again.standardErrors[1]).toBeCloseTo(fit.standardErrors[1]!, 7);
				expect(again.deviance).toBeCloseTo(fit.deviance, 6);
			})
		);
	});

	it('expects as many events as there were, in all and weighted by density (score equations)', () => {
		fc.assert(
			fc.property(rowsArbitrary, (rows) => {
				fc.pre(spreadEnough(rows));
				const fit = fitted(
					rows.map(({ y }) => y),
					rows.map(({ t }) => t),
					withOnes(rows.map(({ d }) => d))
				);
				let total = 0;
				let weighted = 0;
				rows.forEach(({ y, d }, i) => {
					total += y - fit.means[i]!;
					weighted += (y - fit.means[i]!) * d;
				});
				expect(total).toBeCloseTo(0, 7);
				expect(weighted).toBeCloseTo(0, 7);
			})
		);
	});

	it('is not upset by columns of very different size, such as a time in ms since the epoch', () => {
		const days = [0, 1, 2, 3, 4, 5, 6, 7];
		const counts = [2, 3, 3, 5, 4, 8, 9, 12];
		const hours = new Array(8).fill(10);
		const plain = fitted(counts, hours, withOnes(days));
		const stamped = fitted(counts, hours, withOnes(days.map((day) => 1.77e12 + day * 86_400_000)));
		expect(stamped.coefficients[1]! * 86_400_000).toBeCloseTo(plain.coefficients[1]!, 4);
		expect(stamped.deviance).toBeCloseTo(plain.deviance, 5);
	});

	it('leaves out rows without exposure', () => {
		const with0 = fitted([4, 0, 9], [10, 0, 10], withOnes([0.2, 5, 1]));
		expect(with0.rows.n).toBe(2);
		expect(with0.df).toBe(0);
		expect(with0.dispersion).toBeNull();
		expect(testCoefficients(with0)[1]).toMatchObject({ quasiT: null, quasiP: null, quasiStandardError: null });
	});

	it('trap "a factor level without events": says so instead of a coefficient of −20', () => {
		const zone = [0, 0, 0, 1, 1, 1];
		expect(reasonOf([3, 4, 2, 0, 0, 0], [9, 9, 9, 9, 9, 9], withOnes(zone))).toBe('separated');
		expect(reasonOf([3, 4, 2, 0, 0, 1], [9, 9, 9, 9, 9, 9], withOnes(zone))).toBeNull();
	});

	it('gives the reason when nothing can be estimated', () => {
		expect(reasonOf([], [], [])).toBe('no_events');
		expect(reasonOf([0, 0, 0], [5, 5, 5], withOnes([1, 2, 3]))).toBe('no_events');
		expect(reasonOf([1, 2, 3], [5, 5, 5], withOnes([2, 2, 2]))).toBe('dependent_columns');
		expect(reasonOf([1], [5], withOnes([2]))).toBe('dependent_columns');
	});

	it('refuses what cannot be counts, hours or explanations', () => {
		expect(() => reasonOf([1, NaN], [1, 1], withOnes([1, 2]))).toThrow(Failure);
		expect(() => reasonOf([1, 2], [1, -1], withOnes([1, 2]))).toThrow(Failure);
		expect(() => reasonOf([1, 2], [1, 0], withOnes([1, 2]))).toThrow(Failure);
		expect(() => reasonOf([1, 2], [1, 1], withOnes([1, NaN]))).toThrow(Failure);
		expect(() => reasonOf([1, 2], [1], withOnes([1, 2]))).toThrow(Failure);
		expect(() => reasonOf([1, 2], [1, 1], [[1, 2], [1]])).toThrow(Failure);
		expect(() => reasonOf([1, 2], [1, 1], withOnes([1, 2, 3]))).toThrow(Failure);
	});
});

describe('intervals of a coefficient', () => {
	it('trap "overdispersion makes Poisson errors too small": widened by √10.6 with t', () => {
		const fit = fitted([1, 20, 3, 25, 4, 30], [50, 48, 35, 30, 15, 6], withOnes(BANDS));
		expect(fit.dispersion).toBeCloseTo(10.61, 2);
		expect(lengthOf(computeWidenedInterval(fit, 1))).toBeGreaterThan(4 * lengthOf(computeWaldInterval(fit, 1)));
	});

	it('trap "do not shrink by a dispersion below 1": the reported interval stays the Poisson one', () => {
		const fit = fitted([9, 6, 5, 3, 1, 0], new Array(6).fill(50), withOnes(BANDS));
		expect(fit.dispersion).toBeLessThan(0.1);
		expect(computeWidenedInterval(fit, 1)).toEqual(computeWaldInterval(fit, 1));
	});

	it('trap "an exact fit has no quasi t or p"', () => {
		const fit = fitted([4, 4, 4, 4, 4, 4], new Array(6).fill(40), withOnes(BANDS));
		expect(fit.dispersion).toBeCloseTo(0, 12);
		expect(testCoefficients(fit)[1]).toMatchObject({ quasiT: null, quasiP: null });
		expect(testCoefficients(fit)[1]!.p).toBeCloseTo(1, 9);
	});

	it('lies, by profile, where the likelihood has dropped by half of 3.841', () => {
		const counts = [0, 0, 1, 3, 6, 5];
		const hours = [80, 60, 44, 25, 12, 5.5];
		const fit = fitted(counts, hours, withOnes(BANDS));
		const { lower, upper } = computeProfileInterval(fit, 1);
		for (const slope of [lower!, upper!]) {
			const rest = fitted(
				counts,
				hours.map((t, i) => t * Math.exp(slope * BANDS[i]!)),
				counts.map(() => [1])
			);
			expect(fit.logLikelihood - rest.logLikelihood).toBeCloseTo(3.841459 / 2, 6);
		}
		expect(upper! - fit.coefficients[1]!).not.toBeCloseTo(fit.coefficients[1]! - lower!, 2);
	});

	it('gives, by profile, the closed form for one rate alone', () => {
		const fit = fitted([10], [4], [[1]]);
		const { lower, upper } = computeProfileInterval(fit, 0);
		for (const log of [lower!, upper!]) {
			const mean = 4 * Math.exp(log);
			expect(10 * Math.log(10 / mean) - (10 - mean)).toBeCloseTo(3.841459 / 2, 6);
		}
		expect(() => computeProfileInterval(fit, 1)).toThrow(Failure);
	});

	it('bounds a predicted rate on both sides, ever wider away from the data', () => {
		const fit = fitted([2, 5, 8, 11, 14, 9], [60, 55, 40, 30, 18, 6], withOnes(BANDS));
		const near = predictRate(fit, [1, 1]);
		const far = predictRate(fit, [1, 6]);
		expect(near.lower).toBeLessThan(near.rate);
		expect(near.upper).toBeGreaterThan(near.rate);
		expect(far.upper / far.lower).toBeGreaterThan(near.upper / near.lower);
		expect(() => predictRate(fit, [1])).toThrow(Failure);
	});
});

describe('computeClusterRobust', () => {
	const counts = [2, 5, 8, 11, 14, 9, 1, 7, 4, 16, 9, 12];
	const hours = [60, 55, 40, 30, 18, 6, 50, 52, 33, 32, 20, 7];
	const rows = withOnes([...BANDS, ...BANDS]);

	it('trap "the same robot twice is not twice the evidence": copied rows do not shrink the clustered error', () => {
		const once = fitted(counts, hours, rows);
		const twice = fitted([...counts, ...counts], [...hours, ...hours], [...rows, ...rows]);
		const robots = counts.map((_, i) => `r${i}`);
		const clustered = computeClusterRobust(twice, [...robots, ...robots]);
		expect(twice.standardErrors[1]).toBeCloseTo(once.standardErrors[1]! / Math.SQRT2, 9);
		expect(clustered.cr0[1]).toBeCloseTo(computeClusterRobust(once, robots).cr0[1]!, 9);
		expect(clustered.clusters).toBe(12);
	});

	it('equals the row-wise error when each row is its own cluster, and has no small-sample form for one', () => {
		const fit = fitted(counts, hours, rows);
		const alone = computeClusterRobust(
			fit,
			counts.map((_, i) => i)
		);
		expect(Array.from(alone.cr0)).toEqual(Array.from(alone.hc0));
		expect(alone.cr1![1]! / alone.cr0[1]!).toBeCloseTo(Math.sqrt(12 / 11), 12);
		expect(alone.cr1Small![1]! / alone.cr1![1]!).toBeCloseTo(Math.sqrt(11 / 10), 12);
		expect(
			computeClusterRobust(
				fit,
				counts.map(() => 'only')
			).cr1
		).toBeNull();
	});

	it('takes labels by the rows of the data, also when rows were left out', () => {
		const fit = fitted(
			[...counts.slice(0, 3), 0, ...counts.slice(3)],
			[...hours.slice(0, 3), 0, ...hours.slice(3)],
			[...rows.slice(0, 3), [1, 9], ...rows.slice(3)]
		);
		const labels = ['a', 'a', 'b', 'nowhere', 'b', 'c', 'c', 'd', 'd', 'e', 'e', 'f', 'f'];
		expect(computeClusterRobust(fit, labels).clusters).toBe(6);
		expect(() => computeClusterRobust(fit, labels.slice(0, 12))).toThrow(Failure);
	});
});
