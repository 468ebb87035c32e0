import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { testPoissonTrend, testProportionTrend } from './trend.ts';

const COUNTS = [2, 5, 8, 11, 14, 9];
const HOURS = [60, 55, 40, 30, 18, 6];
const MID_DENSITIES = [0.1, 0.3, 0.55, 0.9, 1.6, 2.6];

describe('testPoissonTrend', () => {
	it('trap "trend scores change the answer": mid densities and ranks differ', () => {
		const densities = testPoissonTrend(COUNTS, HOURS, MID_DENSITIES);
		const ranks = testPoissonTrend(COUNTS, HOURS, [1, 2, 3, 4, 5, 6]);
		expect(densities.z).toBeCloseTo(8.917, 3);
		expect(ranks.z).toBeCloseTo(7.976, 3);
		expect(densities.departure.p).toBeGreaterThan(0.5);
		expect(ranks.departure.p).toBeLessThan(0.01);
	});

	it('trap "a hump has trend z = 0": the departure tells', () => {
		const { z, departure } = testPoissonTrend([1, 9, 9, 1], [20, 20, 20, 20], [1, 2, 3, 4]);
		expect(z).toBeCloseTo(0, 12);
		expect(departure).toMatchObject({ df: 2, p: expect.closeTo(0.0017, 4) });
	});

	it('points down when rates fall', () => {
		const { z, pTwoSided, pGreater } = testPoissonTrend([10, 7, 5, 2], [20, 20, 20, 20], [1, 2, 3, 4]);
		expect(z).toBeLessThan(-2);
		expect(pTwoSided).toBeLessThan(0.05);
		expect(pGreater).toBeCloseTo(1 - pTwoSided! / 2, 12);
	});

	it('says nothing without events, without bands, or with one score', () => {
		for (const trend of [
			testPoissonTrend([], [], []),
			testPoissonTrend([0, 0], [5, 5], [1, 2]),
			testPoissonTrend([3, 4], [5, 5], [2, 2])
		]) {
			expect(trend).toMatchObject({ z: null, pTwoSided: null, pGreater: null, departure: { p: null } });
		}
		expect(testPoissonTrend([3, 9], [5, 5], [1, 2]).departure).toMatchObject({ df: 0, p: null });
	});

	it('leaves out bands nobody drove in, and refuses events there', () => {
		const all = testPoissonTrend([...COUNTS, 0], [...HOURS, 0], [...MID_DENSITIES, 4]);
		expect(all).toEqual(testPoissonTrend(COUNTS, HOURS, MID_DENSITIES));
		expect(() => testPoissonTrend([1], [0], [1])).toThrow(Failure);
		expect(() => testPoissonTrend([1], [1], [NaN])).toThrow(Failure);
		expect(() => testPoissonTrend([1, 2], [1], [1, 2])).toThrow(Failure);
	});

	it('does not care for the order of bands, the unit of time, or the zero and unit of the scores', () => {
		const band = fc.record({
			y: fc.nat(20),
			t: fc.double({ min: 0.5, max: 50, noNaN: true }),
			s: fc.integer({ min: 0, max: 9 })
		});
		fc.assert(
			fc.property(fc.array(band, { minLength: 3, maxLength: 9 }), (bands) => {
				const plain = testPoissonTrend(
					bands.map(({ y }) => y),
					bands.map(({ t }) => t),
					bands.map(({ s }) => s)
				);
				const turned = [...bands].reverse();
				const other = testPoissonTrend(
					turned.map(({ y }) => y),
					turned.map(({ t }) => t * 60),
					turned.map(({ s }) => 7 + 3 * s)
				);
				if (plain.z === null) expect(other.z).toBeNull();
				else expect(other.z).toBeCloseTo(plain.z, 8);
				expect(other.heterogeneity.chi2).toBeCloseTo(plain.heterogeneity.chi2, 7);
			})
		);
	});
});

describe('testProportionTrend', () => {
	it('gives χ² 8.2249, p 0.004132 for smokers in four groups (Fleiss 1981, as in the documentation of prop.trend.test; from memory)', () => {
		const { chi2, pTwoSided, z } = testProportionTrend([83, 90, 129, 70], [86, 93, 136, 82], [1, 2, 3, 4]);
		expect(chi2).toBeCloseTo(8.2249, 4);
		expect(pTwoSided).toBeCloseTo(0.004132, 6);
		expect(z).toBeLessThan(0);
	});

	it('says nothing when all or none are events, or without groups', () => {
		const nothing = { z: null, chi2: null, pTwoSided: null };
		expect(testProportionTrend([0, 0], [5, 5], [1, 2])).toEqual(nothing);
		expect(testProportionTrend([5, 5], [5, 5], [1, 2])).toEqual(nothing);
		expect(testProportionTrend([1, 2], [5, 5], [3, 3])).toEqual(nothing);
		expect(testProportionTrend([], [], [])).toEqual(nothing);
	});

	it('refuses more events than trials', () => {
		expect(() => testProportionTrend([6, 1], [5, 5], [1, 2])).toThrow(Failure);
		expect(() => testProportionTrend([1, 1], [5, 5], [1, Infinity])).toThrow(Failure);
	});
});
