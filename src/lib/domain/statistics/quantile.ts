/** Quantiles of a sample, and how sure they are. */

import { bad, requireCount, requireShare } from './check.ts';
import { binomialAtMost } from './distributions.ts';

/**
 * Quantiles by linear interpolation between order statistics, type 7 of Hyndman & Fan (1996, American Statistician 50):
 * position (n − 1)·p in the sorted sample. NaN means "not measured" and is left out; with no value left every quantile is null.
 * Infinite values (a time to collision that never comes) are kept in order. The input is not changed.
 *
 * @param shares each from 0 to 1
 * @throws Failure 'bad_input' for a share outside
 */
export function computeQuantiles(values: ArrayLike<number>, shares: readonly number[]): (number | null)[] {
	const sorted = Float64Array.from(values)
		.filter((value) => !Number.isNaN(value))
		.sort();
	return shares.map((share) => {
		if (!(share >= 0 && share <= 1)) throw bad(`A quantile's share must lie from 0 to 1, not ${share}.`);
		if (sorted.length === 0) return null;
		const position = (sorted.length - 1) * share;
		const below = Math.floor(position);
		const part = position - below;
		const low = sorted[below]!;
		const high = sorted[Math.min(below + 1, sorted.length - 1)]!;
		// Equal neighbours need no interpolation, which between two infinities would give NaN.
		if (part === 0 || low === high) return low;
		return low + part * (high - low);
	});
}

/** One quantile; null for an empty sample. See {@link computeQuantiles}. */
export function computeQuantile(values: ArrayLike<number>, share: number): number | null {
	return computeQuantiles(values, [share])[0]!;
}

export interface RankInterval {
	/** 1-based rank of the lower limit in the sorted sample; null when the sample is too small to bound that side */
	readonly lowerRank: number | null;
	readonly upperRank: number | null;
	/** Probability that the quantile lies between the ranks; a side without a rank counts as unbounded */
	readonly coverage: number;
}

/** Relative slack in comparing probabilities, so that rounding does not move a rank. */
const SLACK = 1 - 64 * Number.EPSILON;

/**
 * Which order statistics bound a quantile whatever the distribution: equal binomial tails (David & Nagaraja 2003, Order
 * Statistics, §7.1; from memory).
 *
 * @param n sample size, ≥ 0
 * @param share quantile, strictly between 0 and 1
 */
export function computeQuantileRanks(n: number, share: number, confidence = 0.95): RankInterval {
	requireCount(n, 'A sample size');
	requireShare(share, 'The quantile');
	const tail = (1 - requireShare(confidence, 'Confidence')) / 2;
	const lower = binomialQuantile(tail, n, share);
	const upper = binomialQuantile(1 - tail, n, share) + 1;
	return {
		lowerRank: lower < 1 ? null : lower,
		upperRank: upper > n ? null : upper,
		coverage: binomialAtMost(upper - 1, n, share) - binomialAtMost(lower - 1, n, share)
	};
}

/** Smallest k with P(X ≤ k) ≥ p. */
function binomialQuantile(p: number, n: number, share: number): number {
	let low = -1;
	let high = n;
	while (high - low > 1) {
		const middle = (low + high) >> 1;
		if (binomialAtMost(middle, n, share) >= p * SLACK) high = middle;
		else low = middle;
	}
	return high;
}
