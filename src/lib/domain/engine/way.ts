/** Which way is forward for a robot. */

import type { Point } from '../geometry/types.ts';

/**
 * Direction of useful progress at (x, y): towards the point of the route `lookAhead` metres beyond the nearest
 * point of it, or straight to the goal when there is no route.
 *
 * @returns rad, counter-clockwise from +x; null when the robot stands on its goal
 */
export function directionAlong(
	route: readonly Point[] | null,
	goal: Point,
	x: number,
	y: number,
	lookAhead: number
): number | null {
	const target = route && route.length > 1 ? pointAhead(route, x, y, lookAhead) : goal;
	const dx = target.x - x;
	const dy = target.y - y;
	return Math.hypot(dx, dy) < 1e-6 ? null : Math.atan2(dy, dx);
}

function pointAhead(route: readonly Point[], x: number, y: number, lookAhead: number): Point {
	let best = Infinity;
	let leg = 1;
	let share = 0;
	for (let index = 1; index < route.length; index++) {
		const from = route[index - 1]!;
		const to = route[index]!;
		const dx = to.x - from.x;
		const dy = to.y - from.y;
		const length2 = dx * dx + dy * dy;
		const along = length2 > 0 ? Math.min(1, Math.max(0, ((x - from.x) * dx + (y - from.y) * dy) / length2)) : 0;
		const distance = Math.hypot(from.x + along * dx - x, from.y + along * dy - y);
		if (distance < best) {
			best = distance;
			leg = index;
			share = along;
		}
	}
	let left = lookAhead;
	for (let index = leg; index < route.length; index++) {
		const from = route[index - 1]!;
		const to = route[index]!;
		const length = Math.hypot(to.x - from.x, to.y - from.y);
		const start = index === leg ? share * length : 0;
		if (length - start >= left && length > 0) {
			const at = (start + left) / length;
			return { x: from.x + at * (to.x - from.x), y: from.y + at * (to.y - from.y) };
		}
		left -= length - start;
	}
	return route.at(-1)!;
}
