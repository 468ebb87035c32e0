/** Poisson regression of event counts on exposure and explanations: does the rate rise with density? */

import gammaln from '@stdlib/math-base-special-gammaln';
import { requireShare, requireSameLength } from './check.ts';
import { prepareRows, type CountData, type CountRows } from './count-data.ts';
import { chiSquareAbove, normalQuantile, normalTwoSided, studentQuantile, studentTwoSided } from './distributions.ts';
import { fitLogLinear, type LogLinear, type NoEstimate } from './log-linear.ts';
import { diagonalRoots } from './matrix.ts';
import type { ChiSquareTest } from './trend.ts';

export interface PoissonFit extends LogLinear {
	readonly rows: CountRows;
	/** Model standard errors, too small when counts vary more than Poisson: see {@link testCoefficients} */
	readonly standardErrors: Float64Array;
	readonly logLikelihood: number;
	readonly aic: number;
	readonly deviance: number;
	/** Deviance of one common rate */
	readonly nullDeviance: number;
	/** n − p; 0 when the model has a parameter for every row */
	readonly df: number;
	/** Σ(y − μ)²/μ */
	readonly pearson: number;
	/** pearson / df, about 1 for Poisson counts; null without a degree of freedom */
	readonly dispersion: number | null;
}

/**
 * Fits ln μ = ln exposure + Xβ by maximum likelihood (McCullagh & Nelder 1989, ch. 6). A change of the unit of exposure
 * moves the intercept by its logarithm and nothing else. Rows without exposure are left out; what cannot be estimated
 * (no rows, no events, a level without events) is an answer with its reason, not an error.
 *
 * @throws Failure 'bad_input' for numbers that cannot be counts, exposures or explanations
 */
export function fitPoisson(data: CountData): PoissonFit | NoEstimate {
	const rows = prepareRows(data);
	const fit = fitLogLinear(rows, 0);
	return fit.kind === 'none' ? fit : describe(rows, fit);
}

function describe(rows: CountRows, fit: LogLinear): PoissonFit {
	const { n, columns: p, counts, exposures } = rows;
	const common = sum(counts) / sum(exposures);
	let logLikelihood = 0;
	let deviance = 0;
	let nullDeviance = 0;
	let pearson = 0;
	for (let i = 0; i < n; i++) {
		const y = counts[i]!;
		const mean = fit.means[i]!;
		logLikelihood += y * Math.log(mean) - mean - gammaln(y + 1);
		deviance += unitDeviance(y, mean);
		nullDeviance += unitDeviance(y, common * exposures[i]!);
		pearson += (y - mean) ** 2 / mean;
	}
	const df = n - p;
	return {
		...fit,
		rows,
		standardErrors: diagonalRoots(fit.covariance, p),
		logLikelihood,
		aic: 2 * p - 2 * logLikelihood,
		deviance,
		nullDeviance,
		df,
		pearson,
		dispersion: df > 0 ? pearson / df : null
	};
}

const sum = (values: Float64Array): number => values.reduce((total, value) => total + value, 0);

const unitDeviance = (y: number, mean: number): number => 2 * ((y > 0 ? y * Math.log(y / mean) : 0) - (y - mean));

/** Below this the counts equal their expectations but for rounding: nothing is left over to measure errors with. */
const EXACT_FIT = 1e-20;

export interface CoefficientTest {
	readonly estimate: number;
	readonly standardError: number;
	readonly z: number;
	readonly p: number;
	/** SE·√dispersion as it comes, even below 1; null without a degree of freedom */
	readonly quasiStandardError: number | null;
	/** Student's t with n − p degrees of freedom; null for an exact fit, where it would be 0/0 or x/0 */
	readonly quasiT: number | null;
	readonly quasiP: number | null;
}

/** One test per coefficient against 0: as Poisson, and with the variance scaled by the dispersion (quasi-likelihood). */
export function testCoefficients(fit: PoissonFit): CoefficientTest[] {
	const { dispersion, df } = fit;
	return Array.from(fit.coefficients, (estimate, j) => {
		const standardError = fit.standardErrors[j]!;
		const z = estimate / standardError;
		const t = dispersion !== null && dispersion > EXACT_FIT ? z / Math.sqrt(dispersion) : null;
		return {
			estimate,
			standardError,
			z,
			p: normalTwoSided(z),
			quasiStandardError: dispersion === null ? null : standardError * Math.sqrt(dispersion),
			quasiT: t,
			quasiP: t === null ? null : studentTwoSided(t, df)
		};
	});
}

/** Likelihood-ratio test against one common rate; meant for designs with a column of ones. p is null for the common rate itself. */
export function testAgainstCommonRate(fit: PoissonFit): ChiSquareTest {
	const df = fit.rows.columns - 1;
	const chi2 = Math.max(0, fit.nullDeviance - fit.deviance);
	return { chi2, df, p: df > 0 ? chiSquareAbove(chi2, df) : null };
}

/** Estimate ± normal quantile × SE, as if the counts were Poisson. Log scale: exp() of the limits bounds a rate ratio. */
export function computeWaldInterval(
	fit: PoissonFit,
	column: number,
	confidence = 0.95
): { lower: number; upper: number } {
	return around(fit.coefficients[column]!, twoSided(normalQuantile, confidence) * fit.standardErrors[column]!);
}

/**
 * The interval to report: widened by √dispersion with Student's t when the counts vary more than Poisson, never narrowed
 * when they happen to vary less, since a dispersion below 1 is mostly luck of sparse counts. Log scale.
 */
export function computeWidenedInterval(
	fit: PoissonFit,
	column: number,
	confidence = 0.95
): { lower: number; upper: number } {
	const { dispersion, df } = fit;
	if (dispersion === null || dispersion <= 1) return computeWaldInterval(fit, column, confidence);
	const quantile = twoSided((share) => studentQuantile(share, df), confidence);
	return around(fit.coefficients[column]!, quantile * fit.standardErrors[column]! * Math.sqrt(dispersion));
}

/** Rate per unit of exposure at one row of explanations, with its Wald interval. */
export function predictRate(
	fit: PoissonFit,
	explanations: ArrayLike<number>,
	confidence = 0.95
): { rate: number; lower: number; upper: number } {
	requireSameLength(explanations, fit.coefficients, 'Explanations and coefficients');
	const p = fit.rows.columns;
	let log = 0;
	let variance = 0;
	for (let a = 0; a < p; a++) {
		log += explanations[a]! * fit.coefficients[a]!;
		for (let b = 0; b < p; b++) variance += explanations[a]! * fit.covariance[a * p + b]! * explanations[b]!;
	}
	const half = twoSided(normalQuantile, confidence) * Math.sqrt(Math.max(0, variance));
	return { rate: Math.exp(log), lower: Math.exp(log - half), upper: Math.exp(log + half) };
}

const around = (estimate: number, half: number) => ({ lower: estimate - half, upper: estimate + half });

const twoSided = (quantile: (share: number) => number, confidence: number): number =>
	quantile(1 - (1 - requireShare(confidence, 'Confidence')) / 2);
