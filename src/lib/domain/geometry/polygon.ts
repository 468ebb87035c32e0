/** Areas, containment and edges of rings and polygons. Metres, floor frame; no function changes its input. */

import type { Area, Bounds, Point, Polygon, Ring, Segment } from './types.ts';

/** m; a point this near to an edge counts as lying on it. Chosen by us: far below any sensor, far above rounding. */
export const ON_EDGE = 1e-9;

/** Where a point is: on the border, strictly inside, or neither. */
type Place = 'inside' | 'border' | 'outside';

/** Area of a ring in m², positive when its corners run counter-clockwise. Fewer than three corners: 0. */
export function computeSignedArea(ring: Ring): number {
	const origin = ring[0];
	if (!origin || ring.length < 3) return 0;
	// Taken from the first corner, so that large coordinates do not cancel.
	let twice = 0;
	for (let i = 1; i + 1 < ring.length; i++) {
		const [ax, ay] = ring[i]!;
		const [bx, by] = ring[i + 1]!;
		twice += (ax - origin[0]) * (by - origin[1]) - (bx - origin[0]) * (ay - origin[1]);
	}
	return twice / 2;
}

/** Area of a ring in m², whatever its direction. Fewer than three corners: 0. */
export const computeRingArea = (ring: Ring): number => Math.abs(computeSignedArea(ring));

/** Area of a polygon less its holes, m². */
export function computePolygonArea({ outer, holes }: Polygon): number {
	return holes.reduce((area, hole) => area - computeRingArea(hole), computeRingArea(outer));
}

/** Area of disjoint polygons, m²; 0 for an empty list. */
export const computeArea = (area: Area): number => area.reduce((sum, polygon) => sum + computePolygonArea(polygon), 0);

/** Whether (x, y) is in the polygon; every border counts as inside, that of a hole too. NaN is outside. */
export function isInside(polygon: Polygon, x: number, y: number): boolean {
	if (placeIn(polygon.outer, x, y) === 'outside') return false;
	return polygon.holes.every((hole) => placeIn(hole, x, y) !== 'inside');
}

/** Whether (x, y) is in the polygon and on none of its borders. NaN is outside. */
export function isStrictlyInside(polygon: Polygon, x: number, y: number): boolean {
	if (placeIn(polygon.outer, x, y) !== 'inside') return false;
	return polygon.holes.every((hole) => placeIn(hole, x, y) === 'outside');
}

/** Whether (x, y) is in the ring, its border included. NaN is outside. */
export const isInsideRing = (ring: Ring, x: number, y: number): boolean => placeIn(ring, x, y) !== 'outside';

/** Even–odd rule with half-open edges, so that a corner is crossed once. */
function placeIn(ring: Ring, x: number, y: number): Place {
	let inside = false;
	const last = ring[ring.length - 1];
	if (!last || Number.isNaN(x) || Number.isNaN(y)) return 'outside';
	let [ax, ay] = last;
	for (const [bx, by] of ring) {
		// The exact distance is worked out only for edges whose box is near the point.
		if (
			x >= Math.min(ax, bx) - ON_EDGE &&
			x <= Math.max(ax, bx) + ON_EDGE &&
			y >= Math.min(ay, by) - ON_EDGE &&
			y <= Math.max(ay, by) + ON_EDGE &&
			distanceToSegment(x, y, { ax, ay, bx, by }) <= ON_EDGE
		) {
			return 'border';
		}
		if (ay > y !== by > y && x < ax + ((bx - ax) * (y - ay)) / (by - ay)) inside = !inside;
		ax = bx;
		ay = by;
	}
	return inside ? 'inside' : 'outside';
}

/** Axis-aligned bounds of the outer ring; minX > maxX for an empty one. */
export function boundsOf({ outer }: Polygon): Bounds {
	let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity];
	for (const [x, y] of outer) {
		if (x < minX) minX = x;
		if (x > maxX) maxX = x;
		if (y < minY) minY = y;
		if (y > maxY) maxY = y;
	}
	return { minX, minY, maxX, maxY };
}

/** Every edge of the outer ring and the holes; edges without length are left out. */
export function edgesOf({ outer, holes }: Polygon): Segment[] {
	const edges: Segment[] = [];
	for (const ring of [outer, ...holes]) {
		ring.forEach(([bx, by], index) => {
			const [ax, ay] = ring[index === 0 ? ring.length - 1 : index - 1]!;
			if (ax !== bx || ay !== by) edges.push({ ax, ay, bx, by });
		});
	}
	return edges;
}

/** Distance from (x, y) to the nearest point of a segment, m. A segment without length is a point. */
export function distanceToSegment(x: number, y: number, { ax, ay, bx, by }: Segment): number {
	const dx = bx - ax;
	const dy = by - ay;
	const squared = dx * dx + dy * dy;
	const along = squared === 0 ? 0 : Math.min(1, Math.max(0, ((x - ax) * dx + (y - ay) * dy) / squared));
	return Math.hypot(ax + along * dx - x, ay + along * dy - y);
}

/**
 * Centre of mass of a polygon less its holes; of a concave one it may lie outside.
 * Without area it is the mean of the outer corners, and NaN when there are none.
 */
export function centroidOf({ outer, holes }: Polygon): Point {
	const [ox, oy] = outer[0] ?? [NaN, NaN];
	let mass = 0;
	let mx = 0;
	let my = 0;
	for (const ring of [outer, ...holes]) {
		const sign = (ring === outer ? 1 : -1) * Math.sign(computeSignedArea(ring));
		ring.forEach(([bx, by], index) => {
			const [ax, ay] = ring[index === 0 ? ring.length - 1 : index - 1]!;
			const cross = sign * ((ax - ox) * (by - oy) - (bx - ox) * (ay - oy));
			mass += cross;
			mx += cross * (ax + bx - 2 * ox);
			my += cross * (ay + by - 2 * oy);
		});
	}
	if (mass > 0) return { x: ox + mx / (3 * mass), y: oy + my / (3 * mass) };
	const mean = (axis: 0 | 1) => outer.reduce((sum, corner) => sum + corner[axis], 0) / outer.length;
	return { x: mean(0), y: mean(1) };
}
