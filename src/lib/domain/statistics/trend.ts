/** Does a rate, or a share, rise with an ordered score such as the density of a band? */

import { bad, requireAmount, requireSameLength } from './check.ts';
import { chiSquareAbove, normalAbove, normalTwoSided } from './distributions.ts';

export interface ChiSquareTest {
	readonly chi2: number;
	readonly df: number;
	/** null with no degree of freedom, where nothing can be tested */
	readonly p: number | null;
}

export interface PoissonTrend {
	/** Score statistic Σ sᵢ(yᵢ − Y·tᵢ/T) and its variance */
	readonly u: number;
	readonly v: number;
	/** Positive when the rate rises with the score; null when nothing can be said: no events, or one score only */
	readonly z: number | null;
	readonly pTwoSided: number | null;
	/** p against "does not rise" */
	readonly pGreater: number | null;
	/** Do the rates differ in any way? */
	readonly heterogeneity: ChiSquareTest;
	/** Do they differ in a way the straight trend does not explain? A hump has z = 0 and a large departure. */
	readonly departure: ChiSquareTest;
}

/**
 * Score test for a trend in Poisson rates (Armitage 1955, Biometrics 11, carried over to counts; the score test of a log-linear
 * model). The answer depends on the scores: mid densities and ranks differ, so say which were used.
 * Bands without exposure say nothing and are left out.
 *
 * @param exposures same unit throughout, ≥ 0
 * @throws Failure 'bad_input' for unequal lengths, negative or non-finite numbers, events without exposure
 */
export function testPoissonTrend(
	counts: ArrayLike<number>,
	exposures: ArrayLike<number>,
	scores: ArrayLike<number>
): PoissonTrend {
	requireSameLength(counts, exposures, 'Counts and exposures');
	requireSameLength(counts, scores, 'Counts and scores');
	const bands: { y: number; t: number; s: number }[] = [];
	for (let i = 0; i < counts.length; i++) {
		const y = requireAmount(counts[i]!, 'A count');
		const t = requireAmount(exposures[i]!, 'Exposure');
		if (!Number.isFinite(scores[i])) throw bad(`A score must be finite, not ${scores[i]}.`);
		if (t === 0 && y > 0) throw bad(`${y} events without any exposure cannot be a rate.`);
		if (t > 0) bands.push({ y, t, s: scores[i]! });
	}
	const events = bands.reduce((sum, { y }) => sum + y, 0);
	const exposure = bands.reduce((sum, { t }) => sum + t, 0);
	const meanScore = bands.reduce((sum, { t, s }) => sum + (s * t) / exposure, 0);
	let u = 0;
	let v = 0;
	let chi2 = 0;
	for (const { y, t, s } of bands) {
		const expected = (events * t) / exposure;
		u += (s - meanScore) * (y - expected);
		v += expected * (s - meanScore) ** 2;
		if (expected > 0) chi2 += (y - expected) ** 2 / expected;
	}
	const z = sameScore(bands) || events === 0 ? null : u / Math.sqrt(v);
	const df = Math.max(0, bands.length - 1);
	return {
		u,
		v,
		z,
		pTwoSided: z === null ? null : normalTwoSided(z),
		pGreater: z === null ? null : normalAbove(z),
		heterogeneity: chiSquareTest(chi2, events === 0 ? 0 : df),
		departure: chiSquareTest(Math.max(0, chi2 - (z ?? 0) ** 2), z === null ? 0 : df - 1)
	};
}

export interface ProportionTrend {
	/** Positive when the share rises with the score; null when all or no trials are events, or there is one score only */
	readonly z: number | null;
	readonly chi2: number | null;
	readonly pTwoSided: number | null;
}

/**
 * Cochran–Armitage test for a trend in shares (Armitage 1955, Biometrics 11), e.g. of passages with a stall by density band.
 * Groups without trials are left out.
 *
 * @throws Failure 'bad_input' for unequal lengths, non-finite scores, more events than trials
 */
export function testProportionTrend(
	events: ArrayLike<number>,
	trials: ArrayLike<number>,
	scores: ArrayLike<number>
): ProportionTrend {
	requireSameLength(events, trials, 'Events and trials');
	requireSameLength(events, scores, 'Events and scores');
	const groups: { x: number; n: number; s: number }[] = [];
	for (let i = 0; i < events.length; i++) {
		const x = requireAmount(events[i]!, 'Events');
		const n = requireAmount(trials[i]!, 'Trials');
		if (x > n) throw bad(`${x} events cannot come from ${n} trials.`);
		if (!Number.isFinite(scores[i])) throw bad(`A score must be finite, not ${scores[i]}.`);
		if (n > 0) groups.push({ x, n, s: scores[i]! });
	}
	const total = groups.reduce((sum, { n }) => sum + n, 0);
	const share = groups.reduce((sum, { x }) => sum + x, 0) / total;
	if (sameScore(groups) || share === 0 || share === 1) return { z: null, chi2: null, pTwoSided: null };
	const meanScore = groups.reduce((sum, { n, s }) => sum + (n * s) / total, 0);
	let u = 0;
	let v = 0;
	for (const { x, n, s } of groups) {
		u += (s - meanScore) * (x - n * share);
		v += share * (1 - share) * n * (s - meanScore) ** 2;
	}
	const z = u / Math.sqrt(v);
	return { z, chi2: z * z, pTwoSided: normalTwoSided(z) };
}

/** Whether all share one score, so that no trend can be asked for; also true of nothing. */
const sameScore = (groups: readonly { s: number }[]): boolean => groups.every(({ s }) => s === groups[0]!.s);

function chiSquareTest(chi2: number, df: number): ChiSquareTest {
	return { chi2, df: Math.max(0, df), p: df > 0 ? chiSquareAbove(chi2, df) : null };
}
