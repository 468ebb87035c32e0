/** How sure a rate or a share is. An interval belongs to its estimate; an estimate nobody measured is null, never 0. */

import betaQuantile from '@stdlib/stats-base-dists-beta-quantile';
import { bad, requireAmount, requireCount, requireShare } from './check.ts';
import { normalQuantile, poissonAtLeast, poissonAtMost, poissonMass } from './distributions.ts';
import { findRoot, searchOutward } from './root.ts';

export interface Estimate {
	/** null when nothing was observed (no exposure, no trials) */
	readonly estimate: number | null;
	readonly lower: number;
	/** `Infinity` when the data set no upper bound */
	readonly upper: number;
}

/**
 * Exact interval of a Poisson rate, events per unit of exposure (Garwood 1936, Biometrika 28).
 *
 * No events: lower 0 and, at 95 %, upper 3.689/exposure; never "0 ± 0". No exposure: no estimate, 0 to Infinity.
 *
 * @param exposure any unit of time × robots, ≥ 0; the rate is per that unit
 * @param confidence two-sided, between 0 and 1
 * @throws Failure 'bad_input' for counts that are not whole, and for events without exposure
 */
export function computeGarwoodInterval(count: number, exposure: number, confidence = 0.95): Estimate {
	return rateInterval(count, exposure, confidence, poissonAtMost, poissonAtLeast);
}

/**
 * Mid-p interval of a Poisson rate: as {@link computeGarwoodInterval}, but only half of the probability of the count seen
 * goes to each tail (Lancaster 1961, from memory). Narrower; covers the level on average, not always.
 */
export function computeMidPInterval(count: number, exposure: number, confidence = 0.95): Estimate {
	return rateInterval(
		count,
		exposure,
		confidence,
		(x, mean) => poissonAtMost(x - 1, mean) + poissonMass(x, mean) / 2,
		(x, mean) => poissonAtLeast(x + 1, mean) + poissonMass(x, mean) / 2
	);
}

type Tail = (count: number, mean: number) => number;

function rateInterval(count: number, exposure: number, confidence: number, atMost: Tail, atLeast: Tail): Estimate {
	requireCount(count, 'A count');
	requireAmount(exposure, 'Exposure');
	const tail = (1 - requireShare(confidence, 'Confidence')) / 2;
	if (exposure === 0) {
		if (count > 0) throw bad(`${count} events without any exposure cannot be a rate.`);
		return { estimate: null, lower: 0, upper: Infinity };
	}
	const tooFew = (mean: number) => atMost(count, mean) - tail;
	const top = searchOutward(tooFew, count, 4 + 4 * Math.sqrt(count)) ?? Infinity;
	const lower = count === 0 ? 0 : findRoot((mean) => atLeast(count, mean) - tail, 0, count + 1);
	const upper = findRoot(tooFew, lower, top);
	return { estimate: count / exposure, lower: lower / exposure, upper: upper / exposure };
}

/**
 * Interval of a share by the score method (Wilson 1927, JASA 22); recommended over the textbook p ± z·SE at small numbers
 * and near 0 and 1 (Newcombe 1998). No trials: no estimate, 0 to 1.
 *
 * @throws Failure 'bad_input' when events are not whole, or more than trials
 */
export function computeWilsonInterval(events: number, trials: number, confidence = 0.95): Estimate {
	requireTrials(events, trials, confidence);
	if (trials === 0) return { estimate: null, lower: 0, upper: 1 };
	const share = events / trials;
	const z2 = normalQuantile(1 - (1 - confidence) / 2) ** 2;
	const centre = share + z2 / (2 * trials);
	const half = Math.sqrt(z2 * ((share * (1 - share)) / trials + z2 / (4 * trials * trials)));
	const scale = 1 + z2 / trials;
	// At the ends the formula gives exactly 0 and 1 on paper but not in floating point.
	const lower = events === 0 ? 0 : Math.max(0, (centre - half) / scale);
	const upper = events === trials ? 1 : Math.min(1, (centre + half) / scale);
	return { estimate: share, lower, upper };
}

/** Exact interval of a share (Clopper & Pearson 1934, Biometrika 26); covers at least the level. No trials: 0 to 1. */
export function computeClopperPearsonInterval(events: number, trials: number, confidence = 0.95): Estimate {
	requireTrials(events, trials, confidence);
	const tail = (1 - confidence) / 2;
	return {
		estimate: trials === 0 ? null : events / trials,
		lower: events === 0 ? 0 : betaQuantile(tail, events, trials - events + 1),
		upper: events === trials ? 1 : betaQuantile(1 - tail, events + 1, trials - events)
	};
}

function requireTrials(events: number, trials: number, confidence: number): void {
	requireCount(events, 'Events');
	requireCount(trials, 'Trials');
	requireShare(confidence, 'Confidence');
	if (events > trials) throw bad(`${events} events cannot come from ${trials} trials.`);
}
