/** Iteratively reweighted least squares for counts with ln μ = ln exposure + Xβ. The kernel of the Poisson and negative binomial models. */

import type { CountRows } from './count-data.ts';
import { cholesky, orthonormalise, sandwichInverse, solveCholesky, solveUpper } from './matrix.ts';

/**
 * Why there is no estimate. `no_events`: every rate is 0 and its logarithm has no value. `dependent_columns`: the columns
 * say the same thing twice, or there are fewer rows than columns. `separated`: a column (such as a zone without events)
 * fits best at −Infinity; use a number such as density instead, or leave the level out. `not_converged`: gave up.
 */
export type NoEstimateReason = 'no_events' | 'dependent_columns' | 'separated' | 'not_converged';

export interface NoEstimate {
	readonly kind: 'none';
	readonly reason: NoEstimateReason;
}

export interface LogLinear {
	readonly kind: 'fit';
	readonly coefficients: Float64Array;
	/** Inverse of the expected information, p × p, row by row */
	readonly covariance: Float64Array;
	/** Expected counts, one per row */
	readonly means: Float64Array;
}

const MOST_STEPS = 80;
/** Largest change of any ln μ that counts as none. */
const SETTLED = 1e-11;
/** A full step this large after all those steps means that the likelihood still rises toward infinity. */
const STILL_RISING = 0.1;

export const none = (reason: NoEstimateReason): NoEstimate => ({ kind: 'none', reason });

/**
 * Maximum-likelihood fit for a variance of μ + dispersion·μ² (McCullagh & Nelder 1989, ch. 2 and 6), to machine precision.
 * Cost n·p² per step, usually 5 to 8 steps.
 *
 * @param inverseTheta 0 for Poisson, 1/θ for the negative binomial
 * @param offsets ln of what multiplies the rate, one per row; the exposure by default
 */
export function fitLogLinear(
	rows: CountRows,
	inverseTheta: number,
	offsets: Float64Array = rows.logExposures
): LogLinear | NoEstimate {
	const { n, columns: p, counts } = rows;
	if (!counts.some((count) => count > 0)) return none('no_events');
	const basis = orthonormalise(rows.design, n, p);
	if (!basis) return none('dependent_columns');
	const { q, r } = basis;

	// Works in the orthonormal columns: eta = offset + q·gamma.
	let eta = Float64Array.from(counts, (count) => Math.log(count + 0.1));
	let means = eta.map(Math.exp);
	let gamma = new Float64Array(p);
	let trial = { eta: new Float64Array(n), means: new Float64Array(n), gamma: new Float64Array(p) };
	const information = new Float64Array(p * p);
	const right = new Float64Array(p);
	let value = -Infinity;
	let change = Infinity;

	for (let step = 0; step < MOST_STEPS && change > SETTLED; step++) {
		gatherNormalEquations(q, n, p, counts, eta, means, offsets, inverseTheta, information, right);
		const lower = cholesky(information, p);
		if (!lower) return none('separated');
		const target = solveCholesky(lower, p, right);
		// The first step starts from the counts themselves, which no gamma need give, so there is nothing to fall behind.
		let reached = -Infinity;
		for (let halving = 0, part = 1; halving < 40; halving++, part /= 2) {
			for (let j = 0; j < p; j++) trial.gamma[j] = gamma[j]! + part * (target[j]! - gamma[j]!);
			predict(q, n, p, offsets, trial.gamma, trial.eta);
			reached = expectAndScore(counts, trial.eta, inverseTheta, trial.means);
			if (reached >= value - 1e-9 * Math.abs(value)) break;
		}
		if (!Number.isFinite(reached)) return none('not_converged');
		value = reached;
		change = largestDifference(trial.eta, eta);
		const old = { eta, means, gamma };
		({ eta, means, gamma } = trial);
		trial = old;
	}
	if (change > STILL_RISING) return none('separated');
	if (change > SETTLED * 1e3) return none('not_converged');

	gatherNormalEquations(q, n, p, counts, eta, means, offsets, inverseTheta, information, right);
	const lower = cholesky(information, p);
	if (!lower) return none('separated');
	return {
		kind: 'fit',
		coefficients: solveUpper(r, p, gamma),
		covariance: sandwichInverse(lower, r, p),
		means
	};
}

/** Fills `information` with QᵀWQ and `right` with QᵀW·(working response without offset). */
function gatherNormalEquations(
	q: Float64Array,
	n: number,
	p: number,
	counts: Float64Array,
	eta: Float64Array,
	means: Float64Array,
	offsets: Float64Array,
	inverseTheta: number,
	information: Float64Array,
	right: Float64Array
): void {
	information.fill(0);
	right.fill(0);
	for (let i = 0; i < n; i++) {
		const mean = means[i]!;
		const weight = mean / (1 + inverseTheta * mean);
		const response = weight * (eta[i]! - offsets[i]!) + (counts[i]! - mean) / (1 + inverseTheta * mean);
		for (let a = 0; a < p; a++) {
			const qa = q[i * p + a]!;
			right[a] = right[a]! + qa * response;
			for (let b = 0; b <= a; b++) information[a * p + b] = information[a * p + b]! + weight * qa * q[i * p + b]!;
		}
	}
	for (let a = 0; a < p; a++) for (let b = 0; b < a; b++) information[b * p + a] = information[a * p + b]!;
}

/** Fills `eta` with offset + q·gamma. */
function predict(
	q: Float64Array,
	n: number,
	p: number,
	offsets: Float64Array,
	gamma: Float64Array,
	eta: Float64Array
): void {
	for (let i = 0; i < n; i++) {
		let sum = offsets[i]!;
		for (let j = 0; j < p; j++) sum += q[i * p + j]! * gamma[j]!;
		eta[i] = sum;
	}
}

/** Fills `means` with exp(eta) and returns the part of the log-likelihood that depends on them. */
function expectAndScore(counts: Float64Array, eta: Float64Array, inverseTheta: number, means: Float64Array): number {
	let sum = 0;
	for (let i = 0; i < counts.length; i++) {
		const mean = Math.exp(eta[i]!);
		means[i] = mean;
		sum += counts[i]! * eta[i]!;
		sum -= inverseTheta === 0 ? mean : (counts[i]! + 1 / inverseTheta) * Math.log1p(mean * inverseTheta);
	}
	return sum;
}

function largestDifference(a: Float64Array, b: Float64Array): number {
	let largest = 0;
	for (let i = 0; i < a.length; i++) largest = Math.max(largest, Math.abs(a[i]! - b[i]!));
	return largest;
}
