/** Where the name of an area is written. */

import type { Bounds, Point, Polygon, Ring } from '../../domain/geometry/types.ts';
import { boundsOf } from './projection.ts';

const GRID = 24;

/**
 * A point well inside the polygon: of a 24 × 24 grid over its box, the one farthest from every edge, preferring the
 * middle among equals so that names of rectangles are centred. The first corner when the polygon has no inside.
 *
 * @param obstacles rings that a name should not be written on
 */
export function computeLabelPoint(polygon: Polygon, obstacles: readonly Ring[] = []): Point {
	const box = boundsOf(polygon.outer);
	const middle = { x: (box.minX + box.maxX) / 2, y: (box.minY + box.maxY) / 2 };
	const near = obstacles.filter((ring) => meets(boundsOf(ring), box));
	let best: Point | null = null;
	let bestScore = -Infinity;
	for (let i = 1; i < GRID; i++) {
		for (let j = 1; j < GRID; j++) {
			const p = {
				x: box.minX + ((box.maxX - box.minX) * i) / GRID,
				y: box.minY + ((box.maxY - box.minY) * j) / GRID
			};
			if (!containsPoint(polygon, p.x, p.y) || near.some((ring) => inRing(ring, p.x, p.y))) continue;
			const edge = Math.min(...[polygon.outer, ...polygon.holes, ...near].map((ring) => distanceToRing(ring, p)));
			const score = edge - 0.15 * Math.hypot(p.x - middle.x, p.y - middle.y);
			if (score > bestScore) [best, bestScore] = [p, score];
		}
	}
	return best ?? { x: polygon.outer[0]?.[0] ?? 0, y: polygon.outer[0]?.[1] ?? 0 };
}

/** Whether a point lies in the polygon and in none of its holes (even–odd rule; the edge itself may fall either way). */
export function containsPoint(polygon: Polygon, x: number, y: number): boolean {
	return inRing(polygon.outer, x, y) && !polygon.holes.some((hole) => inRing(hole, x, y));
}

const meets = (a: Bounds, b: Bounds) => a.minX < b.maxX && b.minX < a.maxX && a.minY < b.maxY && b.minY < a.maxY;

function inRing(ring: Ring, x: number, y: number): boolean {
	let inside = false;
	let [px, py] = ring.at(-1) ?? [NaN, NaN];
	for (const [qx, qy] of ring) {
		if (qy > y !== py > y && x < ((px - qx) * (y - qy)) / (py - qy) + qx) inside = !inside;
		[px, py] = [qx, qy];
	}
	return inside;
}

function distanceToRing(ring: Ring, p: Point): number {
	let nearest = Infinity;
	let [ax, ay] = ring.at(-1) ?? [NaN, NaN];
	for (const [bx, by] of ring) {
		const [dx, dy] = [bx - ax, by - ay];
		const t = Math.min(1, Math.max(0, ((p.x - ax) * dx + (p.y - ay) * dy) / (dx * dx + dy * dy || 1)));
		nearest = Math.min(nearest, Math.hypot(p.x - ax - t * dx, p.y - ay - t * dy));
		[ax, ay] = [bx, by];
	}
	return nearest;
}
