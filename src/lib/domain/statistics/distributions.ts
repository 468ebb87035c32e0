/** Tail probabilities. Each tail is computed as itself, never as one minus the other, so small p-values keep their digits. */

import betainc from '@stdlib/math-base-special-betainc';
import gammaln from '@stdlib/math-base-special-gammaln';
import binomial from '@stdlib/stats-base-dists-binomial-pmf';
import normal from '@stdlib/stats-base-dists-normal-cdf';
import normalInverse from '@stdlib/stats-base-dists-normal-quantile';
import student from '@stdlib/stats-base-dists-t-cdf';
import studentInverse from '@stdlib/stats-base-dists-t-quantile';

/** P(X ≤ count) for a Poisson count; 0 below a count of 0. */
export function poissonAtMost(count: number, mean: number): number {
	return count < 0 ? 0 : gammaTails(count + 1, mean).upper;
}

/** P(X ≥ count) for a Poisson count; 1 at a count of 0 or less. */
export function poissonAtLeast(count: number, mean: number): number {
	return count <= 0 ? 1 : gammaTails(count, mean).lower;
}

/** P(X = count) for a Poisson count. */
export function poissonMass(count: number, mean: number): number {
	if (mean === 0) return count === 0 ? 1 : 0;
	return Math.exp(count * Math.log(mean) - mean - gammaln(count + 1));
}

/** P(X ≤ count) of `trials` with chance `share`. */
export function binomialAtMost(count: number, trials: number, share: number): number {
	if (count < 0) return 0;
	return count >= trials ? 1 : betainc(share, count + 1, trials - count, true, true);
}

/** P(X ≥ count) of `trials` with chance `share`. */
export function binomialAtLeast(count: number, trials: number, share: number): number {
	if (count <= 0) return 1;
	return count > trials ? 0 : betainc(share, count, trials - count + 1, true, false);
}

/** P(X = count) of `trials` with chance `share`. */
export const binomialMass = (count: number, trials: number, share: number): number => binomial(count, trials, share);

/** P(χ² ≥ x) with `df` > 0 degrees of freedom; 1 at x ≤ 0. */
export function chiSquareAbove(x: number, df: number): number {
	return x <= 0 ? 1 : gammaTails(df / 2, x / 2).upper;
}

export const normalAbove = (z: number): number => normal(-z, 0, 1);
export const normalTwoSided = (z: number): number => 2 * normal(-Math.abs(z), 0, 1);
export const normalQuantile = (share: number): number => normalInverse(share, 0, 1);
export const studentTwoSided = (t: number, df: number): number => 2 * student(-Math.abs(t), df);
export const studentQuantile = (share: number, df: number): number => studentInverse(share, df);

const SMALLEST = 1e-300;

/**
 * Regularised incomplete gamma functions P and Q at x ≥ 0, shape > 0: the power series below the mean, the continued
 * fraction above it (Abramowitz & Stegun 1964, 6.5.29 and 6.5.31; from memory). The steps grow with the root of the shape.
 * Own code, because the general-purpose gammainc at hand is wrong in the third digit for shapes near 1000.
 */
export function gammaTails(shape: number, x: number): { readonly lower: number; readonly upper: number } {
	if (x <= 0) return { lower: 0, upper: 1 };
	if (x === Infinity) return { lower: 1, upper: 0 };
	const front = Math.exp(shape * Math.log(x) - x - gammaln(shape));
	if (x < shape + 1) {
		let term = 1 / shape;
		let sum = term;
		for (let n = 1; term > sum * Number.EPSILON * 0.1; n++) sum += term *= x / (shape + n);
		const lower = Math.min(1, front * sum);
		return { lower, upper: 1 - lower };
	}
	// Lentz's way of evaluating a continued fraction from the front.
	let b = x + 1 - shape;
	let c = 1 / SMALLEST;
	let d = 1 / b;
	let fraction = d;
	for (let n = 1; n < 1e6; n++) {
		const a = -n * (n - shape);
		b += 2;
		d = 1 / nonZero(a * d + b);
		c = nonZero(b + a / c);
		fraction *= d * c;
		if (Math.abs(d * c - 1) < Number.EPSILON) break;
	}
	const upper = Math.min(1, front * fraction);
	return { lower: 1 - upper, upper };
}

const nonZero = (value: number): number => (Math.abs(value) < SMALLEST ? SMALLEST : value);
