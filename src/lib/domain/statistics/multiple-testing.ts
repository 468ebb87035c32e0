/** Many tests at once: p-values adjusted for how many were looked at. */

import { bad, requireShare } from './check.ts';

/** One p-value per test; null where a test could not be done. Nulls stay in place and do not count as looked at. */
export type PValues = readonly (number | null)[];

/**
 * False discovery rate for independent or positively dependent tests (Benjamini & Hochberg 1995, JRSS B 57).
 * Order of the input does not matter. The family is what is passed in: pass every test that was looked at.
 *
 * @throws Failure 'bad_input' for a p outside 0…1
 */
export function adjustBenjaminiHochberg(ps: PValues): (number | null)[] {
	return stepUp(ps, 1);
}

/** False discovery rate under any dependence (Benjamini & Yekutieli 2001, Annals of Statistics 29). */
export function adjustBenjaminiYekutieli(ps: PValues): (number | null)[] {
	let harmonic = 0;
	for (let i = 1; i <= familySize(ps); i++) harmonic += 1 / i;
	return stepUp(ps, harmonic);
}

/** Chance of any false alarm at all, any dependence (Holm 1979, Scandinavian Journal of Statistics 6). */
export function adjustHolm(ps: PValues): (number | null)[] {
	const order = ascending(ps);
	const adjusted: (number | null)[] = ps.map(() => null);
	let largest = 0;
	order.forEach((at, i) => {
		largest = Math.max(largest, Math.min(1, (order.length - i) * ps[at]!));
		adjusted[at] = largest;
	});
	return adjusted;
}

/** Chance of any false alarm at all, the simplest bound (Bonferroni; Dunn 1961, JASA 56). */
export function adjustBonferroni(ps: PValues): (number | null)[] {
	const size = ascending(ps).length;
	return ps.map((p) => (p === null ? null : Math.min(1, size * p)));
}

/** An adjusted p equal to the level is a rejection; rounding in m·p/j must not undo that. */
const ROUNDING = 1e-12;

/** Which adjusted p-values reject at `level`; a test that could not be done rejects nothing. */
export function rejectAt(adjusted: PValues, level = 0.05): boolean[] {
	requireShare(level, 'The level');
	return adjusted.map((p) => p !== null && p <= level + ROUNDING);
}

function stepUp(ps: PValues, factor: number): (number | null)[] {
	const order = ascending(ps);
	const adjusted: (number | null)[] = ps.map(() => null);
	let smallest = 1;
	for (let i = order.length - 1; i >= 0; i--) {
		const at = order[i]!;
		smallest = Math.min(smallest, factor * (order.length / (i + 1)) * ps[at]!);
		adjusted[at] = smallest;
	}
	return adjusted;
}

/** Indices of the p-values that exist, smallest first. */
function ascending(ps: PValues): number[] {
	const order: number[] = [];
	ps.forEach((p, i) => {
		if (p === null) return;
		if (!(p >= 0 && p <= 1)) throw bad(`A p-value must lie from 0 to 1, not ${p}.`);
		order.push(i);
	});
	return order.sort((a, b) => ps[a]! - ps[b]!);
}

const familySize = (ps: PValues): number => ps.filter((p) => p !== null).length;
