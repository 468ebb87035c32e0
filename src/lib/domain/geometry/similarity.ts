/**
 * Similarities between map frames and their least-squares fit to control points.
 *
 * Source: Umeyama 1991, *Least-squares estimation of transformation parameters between two point patterns*, IEEE
 * TPAMI 13:376 (from memory). In the plane its singular values have a closed form, see `fitSimilarity`.
 */

import { Failure } from '../failure.ts';
import { wrapAngle } from '../units.ts';
import type { Point, Similarity } from './types.ts';

export const IDENTITY: Similarity = { scale: 1, rotation: 0, tx: 0, ty: 0 };

/** xx, xy, yy of a position, m² */
export type Covariance = readonly [xx: number, xy: number, yy: number];

export function applySimilarity({ scale, rotation, tx, ty }: Similarity, x: number, y: number): Point {
	const c = scale * Math.cos(rotation);
	const s = scale * Math.sin(rotation);
	return { x: c * x - s * y + tx, y: s * x + c * y + ty };
}

/** The similarity that leads back: scale 1/s, rotation −θ. */
export function invertSimilarity({ scale, rotation, tx, ty }: Similarity): Similarity {
	const back = applySimilarity({ scale: 1 / scale, rotation: -rotation, tx: 0, ty: 0 }, tx, ty);
	return { scale: 1 / scale, rotation: -rotation, tx: -back.x, ty: -back.y };
}

/** A heading in the target frame, rad in (−π, π]. */
export const rotateHeading = ({ rotation }: Similarity, heading: number): number => wrapAngle(heading + rotation);

/** A covariance in the target frame: s²·R·C·Rᵀ. */
export function transformCovariance({ scale, rotation }: Similarity, [xx, xy, yy]: Covariance): Covariance {
	const c = Math.cos(rotation);
	const s = Math.sin(rotation);
	const k = scale * scale;
	return [
		k * (c * c * xx - 2 * c * s * xy + s * s * yy),
		k * (c * s * (xx - yy) + (c * c - s * s) * xy),
		k * (s * s * xx + 2 * c * s * xy + c * c * yy)
	];
}

type Corner = readonly [x: number, y: number];

export interface FitOptions {
	/** False fixes the scale at 1, as between two metric frames. Default true. */
	readonly estimateScale?: boolean;
	/** True lets the fit mirror, as an image with y pointing down would need. Default false. */
	readonly allowReflection?: boolean;
	/** One weight ≥ 0 per point; null or absent weighs all alike. */
	readonly weights?: readonly number[] | null;
}

export interface SimilarityFit extends Similarity {
	/** Row by row; `rotation` is the direction of its first column and means nothing where `mirrored`. */
	readonly matrix: readonly [readonly [number, number], readonly [number, number]];
	readonly mirrored: boolean;
	/** Target point less mapped point, target unit */
	readonly residuals: readonly Point[];
	readonly distances: readonly number[];
	/** Root of the (weighted) mean squared distance; always 0 for two points, whatever their quality */
	readonly rms: number;
	readonly maxResidual: number;
	/** √(Σd²/(2n − 4)), noise per axis; null for n ≤ 2, a fixed scale or unequal weights */
	readonly sigma: number | null;
	/** Error at each point of the fit to all others (null where those coincide); null when `sigma` is, or when mirroring is allowed */
	readonly leaveOneOut: readonly (number | null)[] | null;
}

/**
 * The similarity that maps `from` onto `to` with least squared error.
 *
 * @throws Failure 'bad_input' with details `{ reason: 'degenerate' }` when the points of a side coincide; also when
 * the lists differ in length, or a number is not finite, or a weight is negative
 */
export function fitSimilarity(from: readonly Corner[], to: readonly Corner[], options: FitOptions = {}): SimilarityFit {
	const { estimateScale = true, allowReflection = false } = options;
	const weights = options.weights ?? from.map(() => 1);
	checkInput(from, to, weights);
	const core = fitCore(from, to, weights, estimateScale, allowReflection);
	if (!core) {
		throw new Failure('bad_input', 'The control points lie on one spot; choose points far apart.', {
			reason: 'degenerate'
		});
	}
	const residuals = from.map((point, i) => residualAt(core, point, to[i]!));
	const distances = residuals.map(({ x, y }) => Math.hypot(x, y));
	const n = from.length;
	const alike = weights.every((weight) => weight === weights[0]);
	const judged = estimateScale && n > 2 && alike;
	const squares = distances.reduce((sum, d) => sum + d * d, 0);
	const weighted = distances.reduce((sum, d, i) => sum + weights[i]! * d * d, 0);
	return {
		scale: core.scale,
		rotation: Math.atan2(core.matrix[1][0], core.matrix[0][0]),
		tx: core.tx,
		ty: core.ty,
		matrix: core.matrix,
		mirrored: core.mirrored,
		residuals,
		distances,
		rms: Math.sqrt(weighted / weights.reduce((sum, weight) => sum + weight, 0)),
		maxResidual: Math.max(...distances),
		sigma: judged ? Math.sqrt(squares / (2 * n - 4)) : null,
		leaveOneOut: judged && !allowReflection ? from.map((_, i) => errorWithout(i, from, to)) : null
	};
}

interface Core {
	readonly scale: number;
	readonly matrix: readonly [readonly [number, number], readonly [number, number]];
	readonly mirrored: boolean;
	readonly tx: number;
	readonly ty: number;
}

/** Null when the points of either side coincide. */
function fitCore(
	from: readonly Corner[],
	to: readonly Corner[],
	weights: readonly number[],
	estimateScale: boolean,
	allowReflection: boolean
): Core | null {
	const [fx, fy] = weightedMean(from, weights);
	const [gx, gy] = weightedMean(to, weights);
	let [xx, xy, yx, yy, spreadFrom, spreadTo, total] = [0, 0, 0, 0, 0, 0, 0];
	// Centred before multiplying: map coordinates can be millions of metres.
	from.forEach(([px, py], i) => {
		const w = weights[i]!;
		const [ax, ay] = [px - fx, py - fy];
		const [bx, by] = [to[i]![0] - gx, to[i]![1] - gy];
		xx += w * bx * ax;
		xy += w * bx * ay;
		yx += w * by * ax;
		yy += w * by * ay;
		spreadFrom += w * (ax * ax + ay * ay);
		spreadTo += w * (bx * bx + by * by);
		total += w;
	});
	if (isOneSpot(spreadFrom / total, from) || isOneSpot(spreadTo / total, to)) return null;
	// Of all rotations, tr(RᵀΣ) is greatest in direction (xx + yy, yx − xy); of all reflections, at (xx − yy, yx + xy).
	// Those two lengths are the sum and difference of Σ's singular values, in the order its determinant decides.
	const turning = Math.hypot(xx + yy, yx - xy);
	const mirroring = Math.hypot(xx - yy, yx + xy);
	const mirrored = allowReflection && mirroring > turning * (1 + 1e-12);
	const angle = mirrored ? Math.atan2(yx + xy, xx - yy) : Math.atan2(yx - xy, xx + yy);
	const scale = estimateScale ? (mirrored ? mirroring : turning) / spreadFrom : 1;
	const c = Math.cos(angle);
	const s = Math.sin(angle);
	const matrix: Core['matrix'] = mirrored
		? [
				[c, s],
				[s, -c]
			]
		: [
				[c, -s],
				[s, c]
			];
	return {
		scale,
		matrix,
		mirrored,
		tx: gx - scale * (matrix[0][0] * fx + matrix[0][1] * fy),
		ty: gy - scale * (matrix[1][0] * fx + matrix[1][1] * fy)
	};
}

function residualAt({ scale, matrix, tx, ty }: Core, [x, y]: Corner, [u, v]: Corner): Point {
	return {
		x: u - (scale * (matrix[0][0] * x + matrix[0][1] * y) + tx),
		y: v - (scale * (matrix[1][0] * x + matrix[1][1] * y) + ty)
	};
}

function errorWithout(left: number, from: readonly Corner[], to: readonly Corner[]): number | null {
	const others = (points: readonly Corner[]) => points.filter((_, i) => i !== left);
	const core = fitCore(
		others(from),
		others(to),
		others(from).map(() => 1),
		true,
		false
	);
	if (!core) return null;
	const { x, y } = residualAt(core, from[left]!, to[left]!);
	return Math.hypot(x, y);
}

function weightedMean(points: readonly Corner[], weights: readonly number[]): [number, number] {
	const total = weights.reduce((sum, weight) => sum + weight, 0);
	const mean = (axis: 0 | 1) => {
		// From the first point, for the same reason as above.
		const origin = points[0]![axis];
		return origin + points.reduce((sum, point, i) => sum + weights[i]! * (point[axis] - origin), 0) / total;
	};
	return [mean(0), mean(1)];
}

/** Whether a mean squared distance is no more than rounding at this size of coordinates. */
function isOneSpot(spread: number, points: readonly Corner[]): boolean {
	const largest = points.reduce((most, [x, y]) => Math.max(most, Math.abs(x), Math.abs(y)), 0);
	return !(spread > (1e-13 * largest) ** 2);
}

function checkInput(from: readonly Corner[], to: readonly Corner[], weights: readonly number[]): void {
	if (from.length !== to.length || weights.length !== from.length) {
		throw new Failure('bad_input', 'Every control point needs its counterpart and one weight.');
	}
	if (![...from.flat(), ...to.flat(), ...weights].every(Number.isFinite) || weights.some((weight) => weight < 0)) {
		throw new Failure('bad_input', 'Control points must be finite and weights must not be negative.');
	}
	if (weights.filter((weight) => weight > 0).length < 2) {
		throw new Failure('bad_input', 'A fit needs two control points.', { reason: 'degenerate' });
	}
}
