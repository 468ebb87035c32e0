/** The same people seen by two robots: who is who, and where are they when both reports are used. */

import type { Point } from '../geometry/types.ts';
import { assignWithinGate } from './assignment.ts';
import { mahalanobisSquared } from './gating.ts';
import type { Covariance2 } from './kalman.ts';

export interface PositionEstimate extends Point {
	/** m² */
	readonly covariance: Covariance2;
}

export interface CrossFusion {
	/** Squared Mahalanobis distance of every report of the first robot (row) to every one of the second */
	readonly distances: readonly (readonly number[])[];
	/** [index in the first list, index in the second] of reports about one person */
	readonly pairs: readonly (readonly [number, number])[];
	/** One estimate per pair, in the order of `pairs` */
	readonly fused: readonly PositionEstimate[];
	/** Everybody either robot reports, each person once */
	readonly persons: number;
}

const NOTHING: Covariance2 = { xx: 0, xy: 0, yy: 0 };

/**
 * Pairs the reports of two robots and fuses each pair as independent.
 *
 * d² = ΔᵀS⁻¹Δ with S = P_A + P_B + `alignment`, the covariance of what their maps and clocks disagree by; pairs above
 * the gate are forbidden, and an unpaired report costs gate/2. A fixed radius in metres is no substitute: how far two
 * reports of one person lie apart depends on how well each robot measured (METHODS section 6).
 */
export function fuseReports(
	a: readonly PositionEstimate[],
	b: readonly PositionEstimate[],
	gate: number,
	alignment: Covariance2 = NOTHING
): CrossFusion {
	const distances = a.map((p) =>
		b.map((q) =>
			mahalanobisSquared(q.x - p.x, q.y - p.y, addCovariances(addCovariances(p.covariance, q.covariance), alignment))
		)
	);
	const { pairs } = assignWithinGate(distances, gate);
	return {
		distances,
		pairs,
		fused: pairs.map(([i, j]) => fuseIndependent(a[i]!, b[j]!)),
		persons: a.length + b.length - pairs.length
	};
}

/** Information fusion of two independent estimates: P = (P_A⁻¹ + P_B⁻¹)⁻¹. Over-confident when they share a past. */
export const fuseIndependent = (a: PositionEstimate, b: PositionEstimate): PositionEstimate => weigh(a, 1, b, 1);

/**
 * Fusion of two estimates that may share information in an unknown way: covariance intersection,
 * P = (ω P_A⁻¹ + (1 − ω) P_B⁻¹)⁻¹ with the ω that makes det P least (Julier & Uhlmann 1997, from memory). Never more
 * confident than the facts allow: equal covariances stay as they are.
 */
export function fuseCorrelated(a: PositionEstimate, b: PositionEstimate): PositionEstimate {
	const omega = leastOver((w) => determinant(weigh(a, w, b, 1 - w).covariance));
	return weigh(a, omega, b, 1 - omega);
}

/** Point of [0, 1] where a function with one valley is least, to about 1e-6 (golden-section search). */
export function leastOver(f: (omega: number) => number): number {
	const shrink = (Math.sqrt(5) - 1) / 2;
	let low = 0;
	let high = 1;
	let left = high - shrink;
	let right = low + shrink;
	let atLeft = f(left);
	let atRight = f(right);
	for (let k = 0; k < 30; k += 1) {
		if (atLeft <= atRight) {
			high = right;
			[right, atRight] = [left, atLeft];
			left = high - shrink * (high - low);
			atLeft = f(left);
		} else {
			low = left;
			[left, atLeft] = [right, atRight];
			right = low + shrink * (high - low);
			atRight = f(right);
		}
	}
	// The valley may lie at an end, which the search only approaches.
	return [0, 1, (low + high) / 2].reduce((best, omega) => (f(omega) < f(best) ? omega : best));
}

function weigh(a: PositionEstimate, weightA: number, b: PositionEstimate, weightB: number): PositionEstimate {
	const wa = scale(invert(a.covariance), weightA);
	const wb = scale(invert(b.covariance), weightB);
	const covariance = invert(addCovariances(wa, wb));
	const ix = wa.xx * a.x + wa.xy * a.y + wb.xx * b.x + wb.xy * b.y;
	const iy = wa.xy * a.x + wa.yy * a.y + wb.xy * b.x + wb.yy * b.y;
	return {
		x: covariance.xx * ix + covariance.xy * iy,
		y: covariance.xy * ix + covariance.yy * iy,
		covariance
	};
}

const determinant = ({ xx, xy, yy }: Covariance2): number => xx * yy - xy * xy;

function invert(c: Covariance2): Covariance2 {
	const d = determinant(c);
	return { xx: c.yy / d, xy: -c.xy / d, yy: c.xx / d };
}

const scale = (c: Covariance2, by: number): Covariance2 => ({ xx: by * c.xx, xy: by * c.xy, yy: by * c.yy });

const addCovariances = (a: Covariance2, b: Covariance2): Covariance2 => ({
	xx: a.xx + b.xx,
	xy: a.xy + b.xy,
	yy: a.yy + b.yy
});
