/** Regression of counts that vary more than Poisson: variance μ + μ²/θ. */

import digamma from '@stdlib/math-base-special-digamma';
import gammaln from '@stdlib/math-base-special-gammaln';
import trigamma from '@stdlib/math-base-special-trigamma';
import { prepareRows, type CountData } from './count-data.ts';
import { chiSquareAbove } from './distributions.ts';
import { fitPoisson } from './glm.ts';
import { fitLogLinear, none, type LogLinear, type NoEstimate } from './log-linear.ts';
import { diagonalRoots } from './matrix.ts';
import { findRoot } from './root.ts';

export interface NegativeBinomialFit extends LogLinear {
	/** `Infinity` when the counts vary no more than Poisson; then everything else is the Poisson fit */
	readonly theta: number;
	/** null when theta is infinite */
	readonly thetaStandardError: number | null;
	readonly standardErrors: Float64Array;
	readonly logLikelihood: number;
	readonly deviance: number;
	/** Counts theta as a parameter */
	readonly aic: number;
	/** Twice the gain in log-likelihood over Poisson, ≥ 0 */
	readonly likelihoodRatio: number;
	/** Half the χ² tail with one degree of freedom, since θ = Infinity lies on the boundary; 1 when there is no gain */
	readonly likelihoodRatioP: number;
}

const MOST_ROUNDS = 500;
/** Relative change of θ that counts as none. */
const SETTLED = 1e-11;
/** Beyond this θ the model cannot be told from Poisson in double precision; chosen by us. */
const LARGEST_THETA = 1e7;
const SMALLEST_THETA = 1e-6;

/**
 * Maximum-likelihood negative binomial fit, alternating between β for a given θ and θ for given μ (Venables & Ripley 2002,
 * §7.4; from memory). Same input and same missing answers as {@link fitPoisson}.
 */
export function fitNegativeBinomial(data: CountData): NegativeBinomialFit | NoEstimate {
	const rows = prepareRows(data);
	const poisson = fitPoisson(data);
	if (poisson.kind === 'none') return poisson;

	let fit: LogLinear = poisson;
	let theta = Infinity;
	for (let round = 0; ; round++) {
		if (round === MOST_ROUNDS) return none('not_converged');
		const next = computeTheta(rows.counts, fit.means);
		if (next === theta || Math.abs(next - theta) <= SETTLED * next) break;
		theta = next;
		const refit = fitLogLinear(rows, 1 / theta);
		if (refit.kind === 'none') return refit;
		fit = refit;
	}

	const p = rows.columns;
	if (theta === Infinity) {
		const { logLikelihood, deviance, aic, standardErrors } = poisson;
		const same = { theta, thetaStandardError: null, standardErrors, logLikelihood, deviance };
		return { ...fit, ...same, aic: aic + 2, likelihoodRatio: 0, likelihoodRatioP: 1 };
	}
	const { logLikelihood, deviance } = likelihoodAt(rows.counts, fit.means, theta);
	const likelihoodRatio = Math.max(0, 2 * (logLikelihood - poisson.logLikelihood));
	return {
		...fit,
		theta,
		thetaStandardError: 1 / Math.sqrt(thetaInformation(rows.counts, fit.means, theta)),
		standardErrors: diagonalRoots(fit.covariance, p),
		logLikelihood,
		deviance,
		aic: 2 * (p + 1) - 2 * logLikelihood,
		likelihoodRatio,
		likelihoodRatioP: 0.5 * chiSquareAbove(likelihoodRatio, 1)
	};
}

/** The likeliest θ for given expectations; `Infinity` when the counts vary no more about them than Poisson. */
function computeTheta(counts: Float64Array, means: Float64Array): number {
	const slope = (logTheta: number) => thetaScore(counts, means, Math.exp(logTheta));
	let excess = 0;
	for (let i = 0; i < counts.length; i++) excess += (counts[i]! - means[i]!) ** 2 - counts[i]!;
	// Far out the likelihood falls with θ by the excess variance over 2θ², so without excess it is best at infinity.
	if (excess <= 0 || slope(Math.log(LARGEST_THETA)) > 0) return Infinity;
	return Math.exp(findRoot(slope, Math.log(SMALLEST_THETA), Math.log(LARGEST_THETA)));
}

/** Derivative of the log-likelihood by θ. */
function thetaScore(counts: Float64Array, means: Float64Array, theta: number): number {
	let sum = 0;
	const base = digamma(theta);
	for (let i = 0; i < counts.length; i++) {
		const y = counts[i]!;
		const mean = means[i]!;
		if (y > 0) sum += digamma(theta + y) - base;
		sum += (mean - y) / (theta + mean) - Math.log1p(mean / theta);
	}
	return sum;
}

/** Observed information about θ. */
function thetaInformation(counts: Float64Array, means: Float64Array, theta: number): number {
	let sum = 0;
	for (let i = 0; i < counts.length; i++) {
		const y = counts[i]!;
		const mean = means[i]!;
		sum += trigamma(theta) - trigamma(theta + y) - 1 / theta + 2 / (mean + theta) - (y + theta) / (mean + theta) ** 2;
	}
	return sum;
}

function likelihoodAt(counts: Float64Array, means: Float64Array, theta: number) {
	let logLikelihood = 0;
	let deviance = 0;
	for (let i = 0; i < counts.length; i++) {
		const y = counts[i]!;
		const mean = means[i]!;
		const spread = Math.log1p(mean / theta);
		logLikelihood += gammaln(theta + y) - gammaln(theta) - gammaln(y + 1) - (theta + y) * spread;
		if (y > 0) logLikelihood += y * Math.log(mean / theta);
		deviance += 2 * ((y > 0 ? y * Math.log(y / mean) : 0) - (y + theta) * Math.log((y + theta) / (mean + theta)));
	}
	return { logLikelihood, deviance };
}
