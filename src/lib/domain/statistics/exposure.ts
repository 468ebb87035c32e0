/** How much exposure it takes to tell two rates apart: planning, and the chance of success of a plan. */

import { requireAmount, requirePositive, requireShare } from './check.ts';
import { binomialAtLeast, binomialAtMost, binomialMass, normalQuantile, poissonMass } from './distributions.ts';
import { findRoot, searchOutward } from './root.ts';

export interface ExposurePlan {
	/** New rate over base rate that must not be missed, > 0 */
	readonly rateRatio: number;
	/** Two-sided level; default 0.05 */
	readonly alpha?: number;
	/** Wanted chance of telling the rates apart; default 0.8 */
	readonly power?: number;
	/** Exposure of the new arm over exposure of the base arm; default 1 */
	readonly exposureRatio?: number;
}

/** Events to expect in the base arm; {@link computeHours} turns them into hours. All are `Infinity` for a ratio of 1. */
export interface EventsNeeded {
	/** Normal approximation of the log ratio; within a few per cent of exact for equal exposure */
	readonly logFormula: number;
	/** Normal approximation of the square roots */
	readonly sqrtFormula: number;
	/** For the exact central test; null beyond {@link LARGEST_EXACT} events, where the log formula is as good */
	readonly exactCentral: number | null;
	readonly exactMidP: number | null;
}

/** Base events up to which the exact sum is done; chosen by us to keep an answer below a second. */
export const LARGEST_EXACT = 5000;

/**
 * Expected base events for the wanted power. Log form (z + z)²(1 + 1/(k·RR))/(ln RR)²; square-root form
 * (z + z)²(1 + 1/k)/(4(√RR − 1)²) (Huffman 1984; Gu, Ng, Tang & Schucany 2008 compare both; from memory); exact by
 * summation over the total, see {@link computeExactPower}.
 *
 * @throws Failure 'bad_input' for ratios that are not above 0, shares outside 0…1
 */
export function computeEventsNeeded(plan: ExposurePlan): EventsNeeded {
	const { rateRatio, alpha, power, exposureRatio: k } = checkPlan(plan);
	if (rateRatio === 1)
		return { logFormula: Infinity, sqrtFormula: Infinity, exactCentral: Infinity, exactMidP: Infinity };
	const z2 = (normalQuantile(1 - alpha / 2) + normalQuantile(power)) ** 2;
	const logFormula = (z2 * (1 + 1 / (k * rateRatio))) / Math.log(rateRatio) ** 2;
	const sqrtFormula = (z2 * (1 + 1 / k)) / (4 * (Math.sqrt(rateRatio) - 1) ** 2);
	if (!(logFormula < LARGEST_EXACT)) return { logFormula, sqrtFormula, exactCentral: null, exactMidP: null };

	const limits = criticalValues(k / (1 + k), alpha);
	const missing = (kind: 'central' | 'midP') => (events: number) =>
		power - summedPower(events, rateRatio, k, limits)[kind];
	const solve = (kind: 'central' | 'midP'): number | null => {
		const low = logFormula * 0.4;
		const high = searchOutward(missing(kind), low, logFormula * 0.8);
		return high === null ? null : findRoot(missing(kind), missing(kind)(low) > 0 ? low : 0, high);
	};
	return { logFormula, sqrtFormula, exactCentral: solve('central'), exactMidP: solve('midP') };
}

/** Hours in the base arm for that many events at a rate per hour; `Infinity` at rate 0. The other arm needs k times as many. */
export function computeHours(events: number, ratePerHour: number): number {
	return requireAmount(ratePerHour, 'A rate') === 0 ? Infinity : events / ratePerHour;
}

/**
 * Chance that the exact two-sided test rejects equal rates: Σ over totals N of Pois(N; m₀(1 + k·RR))·P(reject | N).
 * For a ratio of 1 that is the true size of the test, below alpha for the central one. No events expected: 0.
 *
 * @param baseEvents expected events in the base arm, ≥ 0
 */
export function computeExactPower(
	baseEvents: number,
	plan: Omit<ExposurePlan, 'power'>
): { central: number; midP: number } {
	const { rateRatio, alpha, exposureRatio } = checkPlan(plan);
	requireAmount(baseEvents, 'Expected events');
	return summedPower(baseEvents, rateRatio, exposureRatio, criticalValues(exposureRatio / (1 + exposureRatio), alpha));
}

function checkPlan({ rateRatio, alpha = 0.05, power = 0.8, exposureRatio = 1 }: ExposurePlan) {
	requirePositive(rateRatio, 'The rate ratio');
	requireShare(alpha, 'Alpha');
	requireShare(power, 'Power');
	requirePositive(exposureRatio, 'The ratio of exposures');
	return { rateRatio, alpha, power, exposureRatio };
}

/** Rejects at or below `low` events in the new arm and at or above `high`. */
interface Limits {
	readonly low: number;
	readonly high: number;
	readonly lowMidP: number;
	readonly highMidP: number;
}

const NEGLIGIBLE = 1e-17;

function summedPower(baseEvents: number, rateRatio: number, k: number, limits: (total: number) => Limits) {
	const mean = baseEvents * (1 + k * rateRatio);
	const share = (k * rateRatio) / (1 + k * rateRatio);
	let central = 0;
	let midP = 0;
	const add = (total: number): boolean => {
		const weight = poissonMass(total, mean);
		const { low, high, lowMidP, highMidP } = limits(total);
		const rejected = binomialAtMost(low, total, share) + binomialAtLeast(high, total, share);
		central += weight * rejected;
		// The mid-p test rejects at most one more count on each side.
		let more = 0;
		if (lowMidP !== low) more += binomialMass(lowMidP, total, share);
		if (highMidP !== high) more += binomialMass(highMidP, total, share);
		midP += weight * (rejected + more);
		return weight > NEGLIGIBLE;
	};
	const mode = Math.floor(mean);
	for (let total = mode; total >= 0 && add(total); total--);
	for (let total = mode + 1; add(total); total++);
	return { central, midP };
}

/** Critical values per total for the null share, looked up once each. */
function criticalValues(share: number, alpha: number): (total: number) => Limits {
	const known = new Map<number, Limits>();
	return (total) => {
		let limits = known.get(total);
		if (!limits) known.set(total, (limits = findLimits(total, share, alpha / 2)));
		return limits;
	};
}

function findLimits(total: number, share: number, tail: number): Limits {
	const spread = -normalQuantile(tail) * Math.sqrt(total * share * (1 - share));
	let low = Math.max(-1, Math.floor(total * share - spread));
	while (low >= 0 && binomialAtMost(low, total, share) > tail) low--;
	while (low < total && binomialAtMost(low + 1, total, share) <= tail) low++;
	let high = Math.min(total + 1, Math.ceil(total * share + spread));
	while (high <= total && binomialAtLeast(high, total, share) > tail) high++;
	while (high > 0 && binomialAtLeast(high - 1, total, share) <= tail) high--;
	const half = (count: number) => binomialMass(count, total, share) / 2;
	const lowMore = low + 1 <= total && binomialAtMost(low, total, share) + half(low + 1) <= tail;
	const highMore = high - 1 >= 0 && binomialAtLeast(high, total, share) + half(high - 1) <= tail;
	return { low, high, lowMidP: lowMore ? low + 1 : low, highMidP: highMore ? high - 1 : high };
}
