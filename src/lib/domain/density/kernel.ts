/**
 * Gaussian-kernel density at a point, with velocity, flow and pressure, and its edge corrections.
 *
 * Sources: Helbing, Johansson & Al-Abideen 2007, *Dynamics of crowd disasters: an empirical study*, Phys. Rev. E
 * 75:046109 (formulas from memory); Diggle 1985, *A kernel method for smoothing point process data*, Appl. Stat. 34
 * (correction per person). The radius R is not a standard deviation: σ = R/√2, and 63 % of the weight lies within R.
 */

import { Failure } from '../failure.ts';
import { computeSignedArea } from '../geometry/polygon.ts';
import type { Polygon, Ring } from '../geometry/types.ts';
import { owensT } from './owens-t.ts';

/** Kernel of radius R at a squared distance in m²: exp(−d²/R²)/(πR²), 1/m². Its integral over the plane is 1. */
export const kernelWeight = (squaredDistance: number, radius: number): number =>
	Math.exp(-squaredDistance / (radius * radius)) / (Math.PI * radius * radius);

/**
 * Share of a kernel's weight that falls on the floor, 0…1: the integral over the polygon of the kernel of radius R
 * round (x, y). A half on a straight wall, a quarter in a right-angled corner. Exact up to rounding.
 */
export function kernelMass({ outer, holes }: Polygon, x: number, y: number, radius: number): number {
	return holes.reduce((mass, hole) => mass - massInRing(hole, x, y, radius), massInRing(outer, x, y, radius));
}

function massInRing(ring: Ring, x: number, y: number, radius: number): number {
	let mass = 0;
	ring.forEach(([bx, by], index) => {
		const [ax, ay] = ring[index === 0 ? ring.length - 1 : index - 1]!;
		mass += massOfEdge(ax - x, ay - y, bx - x, by - y, radius);
	});
	return computeSignedArea(ring) < 0 ? -mass : mass;
}

/**
 * Signed kernel weight of the triangle (centre, a, b). In polar coordinates the radial integral is closed,
 * 1/(2π)·∫ 1 − exp(−(h/(R·cos θ))²) dθ with h the distance of the edge's line, and the rest is Owen's T with √2·h/R.
 */
function massOfEdge(ax: number, ay: number, bx: number, by: number, radius: number): number {
	const dx = bx - ax;
	const dy = by - ay;
	const length = Math.hypot(dx, dy);
	const cross = ax * by - ay * bx;
	const height = Math.abs(cross) / length;
	// An edge through the centre spans no angle.
	if (length === 0 || height < 1e-15) return 0;
	const from = (ax * dx + ay * dy) / length / height;
	const to = (bx * dx + by * dy) / length / height;
	const k = (Math.SQRT2 * height) / radius;
	const angle = Math.atan(to) - Math.atan(from);
	return Math.sign(cross) * (angle / (2 * Math.PI) - (owensT(k, to) - owensT(k, from)));
}

export interface KernelInput {
	/** 2n, x then y, m; a person whose coordinates are not finite is left out */
	readonly points: Float64Array;
	/** 2n, m/s; null when not known */
	readonly velocities: Float64Array | null;
	readonly walkable: Polygon;
	/** R, m */
	readonly radius: number;
}

export interface KernelValue {
	/** persons/m² without correction: too low near walls */
	readonly uncorrected: number;
	/** Share of the kernel at this point that lies on the floor */
	readonly massAtPoint: number;
	/** persons/m², divided by the share at this point; null off the floor, where that is 0 */
	readonly correctedAtPoint: number | null;
	/** persons/m², each person divided by the own share: the form that integrates to the number of persons */
	readonly correctedPerPerson: number;
	/** Null without velocities or without anybody near enough to weigh */
	readonly motion: KernelMotion | null;
}

export interface KernelMotion {
	/** m/s, kernel-weighted mean */
	readonly velocity: readonly [number, number];
	/** persons/(m·s), uncorrected density times velocity */
	readonly flow: readonly [number, number];
	/** m²/s² */
	readonly velocityVariance: number;
	/** 1/s², density times variance of velocity. The source saw turbulence above about 0.02 (from memory); no safety verdict. */
	readonly pressure: number;
}

export interface KernelDensity {
	/** Share of each person's kernel on the floor, in the order of the points; null for a person who was left out */
	readonly massAtPersons: readonly (number | null)[];
	at(x: number, y: number): KernelValue;
}

/**
 * Prepares the density of these persons; each call of `at` costs one pass over them.
 *
 * @throws Failure 'bad_input' when the radius is not positive
 */
export function createKernelDensity({ points, velocities, walkable, radius }: KernelInput): KernelDensity {
	if (!(radius > 0)) throw new Failure('bad_input', 'The kernel radius must be positive.');
	const massAtPersons: (number | null)[] = [];
	for (let i = 0; i + 1 < points.length; i += 2) {
		const known = Number.isFinite(points[i]!) && Number.isFinite(points[i + 1]!);
		massAtPersons.push(known ? kernelMass(walkable, points[i]!, points[i + 1]!, radius) : null);
	}
	const weightsAt = (x: number, y: number) =>
		massAtPersons.map((mass, i) =>
			mass === null ? 0 : kernelWeight((points[2 * i]! - x) ** 2 + (points[2 * i + 1]! - y) ** 2, radius)
		);
	return {
		massAtPersons,
		at(x, y) {
			const weights = weightsAt(x, y);
			const uncorrected = weights.reduce((sum, weight) => sum + weight, 0);
			const massAtPoint = kernelMass(walkable, x, y, radius);
			return {
				uncorrected,
				massAtPoint,
				correctedAtPoint: massAtPoint > 0 ? uncorrected / massAtPoint : null,
				correctedPerPerson: weights.reduce(
					(sum, weight, i) => (weight > 0 ? sum + weight / massAtPersons[i]! : sum),
					0
				),
				motion: velocities && uncorrected > 0 ? motionOf(weights, velocities, uncorrected) : null
			};
		}
	};
}

function motionOf(weights: readonly number[], velocities: Float64Array, density: number): KernelMotion {
	let [vx, vy] = [0, 0];
	weights.forEach((weight, i) => {
		vx += (weight * velocities[2 * i]!) / density;
		vy += (weight * velocities[2 * i + 1]!) / density;
	});
	const velocityVariance = weights.reduce(
		(sum, weight, i) =>
			sum + (weight * ((velocities[2 * i]! - vx) ** 2 + (velocities[2 * i + 1]! - vy) ** 2)) / density,
		0
	);
	return {
		velocity: [vx, vy],
		flow: [density * vx, density * vy],
		velocityVariance,
		pressure: density * velocityVariance
	};
}
