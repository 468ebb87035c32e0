/**
 * Ellipses of plane samples and covariances.
 *
 * Sources: Johnson & Wichern, *Applied Multivariate Statistical Analysis* (χ² contours, Hotelling's T²; from memory).
 * With 2 degrees of freedom χ² is exponential with mean 2, so its quantile is −2·ln(1 − p). With 2 and d degrees the
 * F distribution has P(F > f) = (1 + 2f/d)^(−d/2), so its quantile is (d/2)·((1 − p)^(−2/d) − 1), exact for every d.
 */

import { Failure } from '../failure.ts';
import type { Covariance } from './similarity.ts';

/** χ² quantile with 2 degrees of freedom; 0.95 → 5.991464547. p in [0, 1). */
export const chiSquare2Quantile = (p: number): number => -2 * Math.log1p(-p);

/** F quantile with 2 and `d` > 0 degrees of freedom, p in [0, 1). */
export const f2Quantile = (p: number, d: number): number => (d / 2) * Math.expm1((-2 / d) * Math.log1p(-p));

/** Share of a plane normal distribution inside its k-sigma ellipse: 39.3 %, 86.5 % and 98.9 % for k = 1, 2, 3. */
export const coverageOfSigmas = (k: number): number => -Math.expm1((-k * k) / 2);

export interface Ellipse {
	readonly semiMajor: number;
	readonly semiMinor: number;
	/** Direction of the major axis, rad in (−π/2, π/2]; null for a circle, whose direction is not defined */
	readonly angle: number | null;
	/** Greater first, never negative */
	readonly eigenvalues: readonly [number, number];
	/** Squared Mahalanobis distance of the border */
	readonly k2: number;
	readonly area: number;
}

/**
 * The ellipse that holds share `p` of a normal distribution with this covariance.
 *
 * @throws Failure 'bad_input' when p is not in [0, 1) or the covariance is not finite
 */
export function ellipseOfCovariance([xx, xy, yy]: Covariance, p = 0.95): Ellipse {
	if (!(p >= 0 && p < 1)) throw new Failure('bad_input', 'The share inside an ellipse must be in [0, 1).');
	if (![xx, xy, yy].every(Number.isFinite)) throw new Failure('bad_input', 'The covariance must be finite.');
	const k2 = chiSquare2Quantile(p);
	const eigenvalues = eigenvaluesOf(xx, xy, yy);
	const [major, minor] = eigenvalues;
	const isCircle = major - minor <= 1e-12 * major;
	// Adding 0 turns −0 into 0, which would otherwise point the axis to −π/2.
	const angle = isCircle ? null : 0.5 * Math.atan2(2 * xy + 0, xx - yy);
	return {
		semiMajor: Math.sqrt(k2 * major),
		semiMinor: Math.sqrt(k2 * minor),
		angle,
		eigenvalues,
		k2,
		area: Math.PI * k2 * Math.sqrt(major * minor)
	};
}

export interface SampleEllipse extends Ellipse {
	readonly n: number;
	readonly mean: readonly [number, number];
	/** With n − 1 */
	readonly covariance: Covariance;
	/** Region for one more point and for the mean, valid for small n; null for n = 2, where there is none */
	readonly smallSample: {
		readonly predictionK2: number;
		readonly meanK2: number;
		/** Semi-axes of the ellipse of the mean */
		readonly meanSemiAxes: readonly [number, number];
	} | null;
}

/**
 * The ellipse of a sample; null for fewer than two points, where none is defined.
 *
 * @throws Failure 'bad_input' when p is not in [0, 1) or a coordinate is not finite
 */
export function ellipseOfSample(points: readonly (readonly [number, number])[], p = 0.95): SampleEllipse | null {
	const n = points.length;
	if (n < 2) return null;
	const mean = meanOf(points);
	let [xx, xy, yy] = [0, 0, 0];
	// A second pass about the mean: sums of raw squares lose everything at map coordinates of 10⁶ m.
	for (const [x, y] of points) {
		const [dx, dy] = [x - mean[0], y - mean[1]];
		xx += dx * dx;
		xy += dx * dy;
		yy += dy * dy;
	}
	const covariance: Covariance = [xx / (n - 1), xy / (n - 1), yy / (n - 1)];
	return { n, mean, covariance, ...ellipseOfCovariance(covariance, p), smallSample: smallSample(n, p, covariance) };
}

function smallSample(n: number, p: number, [xx, xy, yy]: Covariance): SampleEllipse['smallSample'] {
	if (n <= 2) return null;
	const quantile = f2Quantile(p, n - 2);
	const meanK2 = ((2 * (n - 1)) / (n * (n - 2))) * quantile;
	const [major, minor] = eigenvaluesOf(xx, xy, yy);
	return {
		predictionK2: meanK2 * (n + 1),
		meanK2,
		meanSemiAxes: [Math.sqrt(meanK2 * major), Math.sqrt(meanK2 * minor)]
	};
}

/**
 * Squared Mahalanobis distance of (dx, dy) from the centre: 0 at the centre, Infinity off the line (or point) that a
 * singular covariance has shrunk to.
 */
export function mahalanobisSquared([xx, xy, yy]: Covariance, dx: number, dy: number): number {
	const determinant = xx * yy - xy * xy;
	if (determinant > 0) return (yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy) / determinant;
	const trace = xx + yy;
	const across = trace > 0 ? yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy : dx * dx + dy * dy;
	if (across > 1e-12 * trace * (dx * dx + dy * dy)) return Infinity;
	return trace > 0 ? (dx * dx + dy * dy) / trace : 0;
}

/** Whether (dx, dy) from the centre is in the ellipse that holds share `p`, border included. */
export const isInsideEllipse = (covariance: Covariance, dx: number, dy: number, p = 0.95): boolean =>
	mahalanobisSquared(covariance, dx, dy) <= chiSquare2Quantile(p);

/** Rounding may push the smaller one below zero when points are collinear: clamped. */
function eigenvaluesOf(xx: number, xy: number, yy: number): readonly [number, number] {
	const middle = (xx + yy) / 2;
	const half = Math.hypot((xx - yy) / 2, xy);
	return [Math.max(0, middle + half), Math.max(0, middle - half)];
}

function meanOf(points: readonly (readonly [number, number])[]): readonly [number, number] {
	const [ox, oy] = points[0]!;
	let [sx, sy] = [0, 0];
	for (const [x, y] of points) {
		sx += x - ox;
		sy += y - oy;
	}
	return [ox + sx / points.length, oy + sy / points.length];
}
