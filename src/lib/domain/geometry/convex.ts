/**
 * Clipping and measuring of small polygons in flat arrays, the inner loops of density and grid.
 *
 * A `Flat` is x0, y0, x1, y1, …, in metres. A convex one runs counter-clockwise. Clipping a concave ring leaves
 * coincident edges there and back along the cut (Sutherland & Hodgman 1974); they enclose nothing, so every
 * measure here, being a signed sum over edges, is exact all the same.
 */

import type { Ring } from './types.ts';

export type Flat = readonly number[];

const NOTHING: Flat = [];

export const flatFrom = (ring: Ring): number[] => ring.flatMap(([x, y]) => [x, y]);

/** Corners counter-clockwise. */
export const rectangle = (minX: number, minY: number, maxX: number, maxY: number): Flat => [
	minX,
	minY,
	maxX,
	minY,
	maxX,
	maxY,
	minX,
	maxY
];

/**
 * m; a corner this near to a cutting line lies on it. Cutting it off would leave an edge of rounding length, whose
 * direction means nothing and would cut away anything when clipped along. Chosen by us, far above rounding.
 */
const ON_LINE = 1e-9;

/** The part with nx·x + ny·y ≤ c: the same array when nothing is cut off, an empty one when nothing is left. */
export function clipHalfPlane(polygon: Flat, nx: number, ny: number, c: number): Flat {
	const size = polygon.length;
	const near = ON_LINE * (Math.abs(nx) + Math.abs(ny));
	let cut = false;
	let kept = false;
	for (let i = 0; i < size; i += 2) {
		const d = nx * polygon[i]! + ny * polygon[i + 1]! - c;
		if (d > near) cut = true;
		else if (d < -near) kept = true;
	}
	if (!cut) return polygon;
	if (!kept) return NOTHING;
	const out: number[] = [];
	let ax = polygon[size - 2]!;
	let ay = polygon[size - 1]!;
	let da = nx * ax + ny * ay - c;
	for (let i = 0; i < size; i += 2) {
		const bx = polygon[i]!;
		const by = polygon[i + 1]!;
		const db = nx * bx + ny * by - c;
		if ((da < -near && db > near) || (da > near && db < -near)) {
			const share = da / (da - db);
			out.push(ax + (bx - ax) * share, ay + (by - ay) * share);
		}
		if (db <= near) out.push(bx, by);
		ax = bx;
		ay = by;
		da = db;
	}
	return out.length < 6 ? NOTHING : out;
}

/** The part of any ring inside a convex polygon; none inside one that is too thin to have three edges. */
export function clipToConvex(ring: Flat, convex: Flat): Flat {
	let out = ring;
	let ax = convex[convex.length - 2]!;
	let ay = convex[convex.length - 1]!;
	let edges = 0;
	for (let i = 0; i < convex.length && out.length > 0; i += 2) {
		const bx = convex[i]!;
		const by = convex[i + 1]!;
		const nx = by - ay;
		const ny = ax - bx;
		// Measured from the middle of the edge, so that both of its ends come out alike.
		const c = (nx * (ax + bx) + ny * (ay + by)) / 2;
		if (Math.abs(nx) + Math.abs(ny) > ON_LINE) {
			out = clipHalfPlane(out, nx, ny, c);
			edges += 1;
		}
		ax = bx;
		ay = by;
	}
	return edges < 3 ? NOTHING : out;
}

/** Signed area, m²; positive counter-clockwise. */
export function flatArea(polygon: Flat): number {
	const ox = polygon[0]!;
	const oy = polygon[1]!;
	let twice = 0;
	for (let i = 2; i + 3 < polygon.length; i += 2) {
		twice += (polygon[i]! - ox) * (polygon[i + 3]! - oy) - (polygon[i + 2]! - ox) * (polygon[i + 1]! - oy);
	}
	return twice / 2;
}

/**
 * Signed area of the polygon inside the disc round (x, y), m²; radius Infinity means no disc.
 * Exact: each edge adds its triangle with the centre where it runs inside, and a sector where it runs outside.
 */
export function flatAreaInDisc(polygon: Flat, x: number, y: number, radius: number): number {
	const size = polygon.length;
	if (size < 6) return 0;
	const squared = radius * radius;
	let reachesOut = false;
	for (let i = 0; i < size && !reachesOut; i += 2) {
		const dx = polygon[i]! - x;
		const dy = polygon[i + 1]! - y;
		reachesOut = dx * dx + dy * dy > squared;
	}
	if (!reachesOut) return flatArea(polygon);
	let sum = 0;
	let ax = polygon[size - 2]! - x;
	let ay = polygon[size - 1]! - y;
	for (let i = 0; i < size; i += 2) {
		const bx = polygon[i]! - x;
		const by = polygon[i + 1]! - y;
		sum += edgeInDisc(ax, ay, bx, by, squared);
		ax = bx;
		ay = by;
	}
	return sum;
}

/** Signed area of the triangle (centre, a, b) inside the disc, the centre being the origin. */
function edgeInDisc(ax: number, ay: number, bx: number, by: number, squared: number): number {
	const dx = bx - ax;
	const dy = by - ay;
	const a = dx * dx + dy * dy;
	if (a === 0) return 0;
	const b = ax * dx + ay * dy;
	const root = b * b - a * (ax * ax + ay * ay - squared);
	if (root <= 0) return sector(ax, ay, bx, by, squared);
	const t0 = (-b - Math.sqrt(root)) / a;
	const t1 = (-b + Math.sqrt(root)) / a;
	if (t1 <= 0 || t0 >= 1) return sector(ax, ay, bx, by, squared);
	const from = t0 > 0 ? t0 : 0;
	const to = t1 < 1 ? t1 : 1;
	const px = ax + dx * from;
	const py = ay + dy * from;
	const qx = ax + dx * to;
	const qy = ay + dy * to;
	let sum = (px * qy - py * qx) / 2;
	if (t0 > 0) sum += sector(ax, ay, px, py, squared);
	if (t1 < 1) sum += sector(qx, qy, bx, by, squared);
	return sum;
}

const sector = (ax: number, ay: number, bx: number, by: number, squared: number): number =>
	(squared / 2) * Math.atan2(ax * by - ay * bx, ax * bx + ay * by);

/** Trapezoids and triangles, counter-clockwise, that tile a polygon given as its rings (even–odd). */
export function convexPieces(rings: readonly Flat[]): Flat[] {
	const levels = [...new Set(rings.flatMap((ring) => ring.filter((_, index) => index % 2 === 1)))].sort(
		(a, b) => a - b
	);
	const pieces: Flat[] = [];
	for (let k = 0; k + 1 < levels.length; k++) {
		const low = levels[k]!;
		const high = levels[k + 1]!;
		const sides = sidesBetween(rings, low, high);
		for (let i = 0; i + 1 < sides.length; i += 2) {
			const left = sides[i]!;
			const right = sides[i + 1]!;
			pieces.push([left.low, low, right.low, low, right.high, high, left.high, high]);
		}
	}
	return pieces;
}

/** x of every edge that runs through the band, at its lower and upper rim, left to right. */
function sidesBetween(rings: readonly Flat[], low: number, high: number): { low: number; high: number }[] {
	const sides: { low: number; high: number }[] = [];
	for (const ring of rings) {
		for (let i = 0; i < ring.length; i += 2) {
			const j = (i + 2) % ring.length;
			const [ax, ay, bx, by] = [ring[i]!, ring[i + 1]!, ring[j]!, ring[j + 1]!];
			if (Math.min(ay, by) > low + ON_LINE || Math.max(ay, by) < high - ON_LINE || ay === by) continue;
			const at = (y: number) => ax + (bx - ax) * Math.min(1, Math.max(0, (y - ay) / (by - ay)));
			sides.push({ low: at(low), high: at(high) });
		}
	}
	return sides.sort((a, b) => a.low + a.high - b.low - b.high);
}
