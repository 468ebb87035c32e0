/** Two rates compared: did stalls per robot-hour change? */

import { bad, requireAmount, requireCount, requirePositive, requireShare } from './check.ts';
import { binomialAtLeast, binomialAtMost, binomialMass, normalQuantile } from './distributions.ts';
import { computeClopperPearsonInterval } from './intervals.ts';
import { findRoot } from './root.ts';

/** Events and the exposure they came from, in one unit for both arms. */
export interface RateArm {
	readonly count: number;
	readonly exposure: number;
}

/** A p-value with the interval that agrees with it: p < 1 − confidence exactly when the interval leaves out the null ratio. */
export interface RatioTest {
	readonly p: number;
	readonly lower: number;
	readonly upper: number;
}

export interface RateRatio {
	/** First rate over second; `Infinity` when only the second has no events, null when neither has or an arm has no exposure */
	readonly ratio: number | null;
	/** The test to report: twice the smaller tail, with the Clopper–Pearson interval */
	readonly central: RatioTest;
	/** Less conservative: half of the probability of what was seen in each tail */
	readonly midP: RatioTest;
	/** p of "all outcomes no likelier than this one". It has no matching interval here: never print it beside one. */
	readonly minLikelihoodP: number;
	/** Large-sample interval; null when a count is 0, where it does not exist */
	readonly wald: { readonly lower: number; readonly upper: number } | null;
	/** Share of all events expected in the first arm under the null ratio; null without exposure */
	readonly nullShare: number | null;
}

export interface RatioOptions {
	/** Ratio to test against; default 1 */
	readonly nullRatio?: number;
	/** Two-sided level of the intervals; default 0.95 */
	readonly confidence?: number;
}

/** What is known when nothing was observed: nothing. */
const NOTHING: RatioTest = { p: 1, lower: 0, upper: Infinity };

/**
 * Ratio of two Poisson rates with exact tests given the total (Przyborowski & Wilenski 1940, Biometrika 31; pairing of tests
 * and intervals after Fay 2010, R Journal 2). No events in either arm, or an arm without exposure: p 1, interval 0 to Infinity.
 *
 * @throws Failure 'bad_input' for counts that are not whole, events without exposure, a null ratio that is not above 0
 */
export function compareRates(first: RateArm, second: RateArm, options: RatioOptions = {}): RateRatio {
	const nullRatio = requirePositive(options.nullRatio ?? 1, 'The null ratio');
	const confidence = requireShare(options.confidence ?? 0.95, 'Confidence');
	for (const arm of [first, second]) {
		requireCount(arm.count, 'A count');
		requireAmount(arm.exposure, 'Exposure');
		if (arm.exposure === 0 && arm.count > 0) throw bad(`${arm.count} events without any exposure cannot be a rate.`);
	}
	const [x1, x2] = [first.count, second.count];
	const total = x1 + x2;
	const measured = first.exposure > 0 && second.exposure > 0;
	const nullShare = measured ? (nullRatio * first.exposure) / (nullRatio * first.exposure + second.exposure) : null;
	if (nullShare === null || total === 0) {
		return { ratio: null, central: NOTHING, midP: NOTHING, minLikelihoodP: 1, wald: null, nullShare };
	}

	const scale = second.exposure / first.exposure;
	const ratioOf = (share: number) => (share >= 1 ? Infinity : (share / (1 - share)) * scale);
	const tail = Math.min(binomialAtMost(x1, total, nullShare), binomialAtLeast(x1, total, nullShare));
	const exact = computeClopperPearsonInterval(x1, total, confidence);
	const mid = midPShare(x1, total, (1 - confidence) / 2);
	return {
		ratio: x2 === 0 ? Infinity : (x1 / x2) * scale,
		central: { p: Math.min(1, 2 * tail), lower: ratioOf(exact.lower), upper: ratioOf(exact.upper) },
		midP: {
			p: Math.min(1, 2 * (tail - binomialMass(x1, total, nullShare) / 2)),
			lower: ratioOf(mid.lower),
			upper: ratioOf(mid.upper)
		},
		minLikelihoodP: minLikelihoodP(x1, total, nullShare),
		wald: waldInterval(x1, x2, scale, confidence),
		nullShare
	};
}

function midPShare(x: number, total: number, tail: number): { lower: number; upper: number } {
	const half = (share: number) => binomialMass(x, total, share) / 2;
	return {
		lower: x === 0 ? 0 : findRoot((share) => binomialAtLeast(x + 1, total, share) + half(share) - tail, 0, 1),
		upper: x === total ? 1 : findRoot((share) => binomialAtMost(x - 1, total, share) + half(share) - tail, 0, 1)
	};
}

function waldInterval(x1: number, x2: number, scale: number, confidence: number): RateRatio['wald'] {
	if (x1 === 0 || x2 === 0) return null;
	const log = Math.log((x1 / x2) * scale);
	const half = normalQuantile(1 - (1 - confidence) / 2) * Math.sqrt(1 / x1 + 1 / x2);
	return { lower: Math.exp(log - half), upper: Math.exp(log + half) };
}

/** Outcomes within this of the observed probability count as equally likely; the factor common exact tests use. */
const TIE = 1 + 1e-7;

function minLikelihoodP(x: number, total: number, share: number): number {
	const expected = total * share;
	if (x === expected) return 1;
	const limit = binomialMass(x, total, share) * TIE;
	const unlikely = (k: number) => binomialMass(k, total, share) <= limit;
	// The masses fall away from the mean, so the other tail is found by walking in from its end.
	if (x < expected) {
		let from = total + 1;
		while (from - 1 >= Math.ceil(expected) && unlikely(from - 1)) from--;
		return Math.min(1, binomialAtMost(x, total, share) + binomialAtLeast(from, total, share));
	}
	let to = -1;
	while (to + 1 <= Math.floor(expected) && unlikely(to + 1)) to++;
	return Math.min(1, binomialAtMost(to, total, share) + binomialAtLeast(x, total, share));
}
