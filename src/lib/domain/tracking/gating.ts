/** May this measurement belong to that track? Distances in units of what is uncertain, not in metres. */

import chiSquareQuantile from '@stdlib/stats-base-dists-chisquare-quantile';
import type { Covariance2 } from './kalman.ts';

/**
 * Largest squared Mahalanobis distance that keeps a true pair with probability `p` (0…1): the χ² quantile.
 * For the 2 degrees of freedom of a position it is −2 ln(1 − p), exact. NaN when p or dof is out of range.
 */
export function chiSquareGate(p: number, dof: number): number {
	if (!(p >= 0 && p <= 1) || !(dof > 0)) return NaN;
	return dof === 2 ? -2 * Math.log1p(-p) : chiSquareQuantile(p, dof);
}

/**
 * ΔᵀS⁻¹Δ of an offset (dx, dy), metres, under covariance `s` (Mahalanobis 1936). `Infinity` when `s` is singular or
 * not a covariance: nothing can be said to be near then.
 */
export function mahalanobisSquared(dx: number, dy: number, s: Covariance2): number {
	const determinant = s.xx * s.yy - s.xy * s.xy;
	if (!(determinant > 0) || !(s.xx > 0)) return Infinity;
	return (dx * dx * s.yy - 2 * dx * dy * s.xy + dy * dy * s.xx) / determinant;
}
