import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import {
	adjustBenjaminiHochberg,
	adjustBenjaminiYekutieli,
	adjustBonferroni,
	adjustHolm,
	rejectAt
} from './multiple-testing.ts';

/** The 15 p-values of Benjamini & Hochberg (1995, JRSS B 57, section 3; from memory). */
const EXAMPLE = [
	0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.324, 0.4262, 0.5719, 0.6528, 0.759, 1
];
const rejected = (adjusted: (number | null)[]) => rejectAt(adjusted).filter(Boolean).length;

describe('adjusted p-values', () => {
	it('reject 4 of the 15 in the example of Benjamini & Hochberg, where Bonferroni rejects 3', () => {
		expect(rejected(adjustBenjaminiHochberg(EXAMPLE))).toBe(4);
		expect(rejected(adjustBonferroni(EXAMPLE))).toBe(3);
	});

	it('trap "the family actually looked at": the same p is no longer enough among many', () => {
		expect(rejected(adjustBenjaminiHochberg([0.03]))).toBe(1);
		expect(rejected(adjustBenjaminiHochberg([0.03, ...new Array(19).fill(0.7)]))).toBe(0);
	});

	it('trap "an exact tie with the level": 0.05 three times over is rejected three times', () => {
		expect(rejected(adjustBenjaminiHochberg([0.05, 0.05, 0.05]))).toBe(3);
	});

	it('keep tests that could not be done apart', () => {
		expect(adjustBenjaminiHochberg([0.04, null, 0.01])).toEqual([0.04, null, 0.02]);
		expect(adjustHolm([null, 0.01])).toEqual([null, 0.01]);
		expect(adjustBonferroni([null, 0.2, 0.01])).toEqual([null, 0.4, 0.02]);
		expect(rejectAt([null, 0.01])).toEqual([false, true]);
		expect(adjustBenjaminiYekutieli([])).toEqual([]);
	});

	it('refuse what is not a p-value', () => {
		for (const p of [-0.1, 1.1, NaN]) expect(() => adjustBenjaminiHochberg([p])).toThrow(Failure);
		expect(() => rejectAt([0.1], 0)).toThrow(Failure);
	});

	it('do not care for the order, never shrink a p, and are ordered: BH ≤ Holm ≤ Bonferroni', () => {
		fc.assert(
			fc.property(fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 1, maxLength: 25 }), (ps) => {
				const [bh, by, holm, bonferroni] = [
					adjustBenjaminiHochberg(ps),
					adjustBenjaminiYekutieli(ps),
					adjustHolm(ps),
					adjustBonferroni(ps)
				];
				ps.forEach((p, i) => {
					expect(bh[i]).toBeGreaterThanOrEqual(p * (1 - 1e-12));
					expect(by[i]).toBeGreaterThanOrEqual(bh[i]! - 1e-12);
					expect(holm[i]).toBeGreaterThanOrEqual(bh[i]! - 1e-12);
					expect(bonferroni[i]).toBeGreaterThanOrEqual(holm[i]! - 1e-12);
				});
				expect(adjustBenjaminiHochberg([...ps].reverse()).reverse()).toEqual(bh);
				expect(adjustHolm([...ps].reverse()).reverse()).toEqual(holm);
			})
		);
	});
});
