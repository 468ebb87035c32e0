/** Where on its route a robot is, and what it steers for. */

import type { Point } from '../../src/lib/domain/geometry/types.ts';
import type { NavGrid } from '../core/nav-grid.ts';

/** m */
const LOOK_AHEAD = 1.6;

/** A point of the route about LOOK_AHEAD metres on; falls back along the route to one in plain view. */
export function lookAhead(route: readonly Point[], at: Point, grid: NavGrid): Point {
	let best = 0;
	let bestShare = 0;
	let least = Infinity;
	for (let i = 0; i + 1 < route.length; i++) {
		const a = route[i]!;
		const b = route[i + 1]!;
		const dx = b.x - a.x;
		const dy = b.y - a.y;
		const length2 = dx * dx + dy * dy;
		const share = length2 > 0 ? Math.max(0, Math.min(1, ((at.x - a.x) * dx + (at.y - a.y) * dy) / length2)) : 0;
		const away = Math.hypot(a.x + share * dx - at.x, a.y + share * dy - at.y);
		if (away < least) [least, best, bestShare] = [away, i, share];
	}
	let left = LOOK_AHEAD;
	let share = bestShare;
	let target: Point = route[route.length - 1]!;
	for (let i = best; i + 1 < route.length; i++) {
		const a = route[i]!;
		const b = route[i + 1]!;
		const length = Math.hypot(b.x - a.x, b.y - a.y);
		if ((1 - share) * length >= left) {
			const s = share + left / length;
			target = { x: a.x + s * (b.x - a.x), y: a.y + s * (b.y - a.y) };
			break;
		}
		left -= (1 - share) * length;
		share = 0;
	}
	if (grid.walls.isBlocked(at.x, at.y, target.x, target.y)) {
		const a = route[best]!;
		const b = route[Math.min(best + 1, route.length - 1)]!;
		return least > 0.5 ? { x: a.x + bestShare * (b.x - a.x), y: a.y + bestShare * (b.y - a.y) } : b;
	}
	return target;
}

/** Whether a route leads through a door, within reach of a robot that keeps to it. */
export const passes = (route: readonly Point[], door: Point): boolean =>
	route.some((a, i) => {
		const b = route[i + 1];
		if (!b) return false;
		const dx = b.x - a.x;
		const dy = b.y - a.y;
		const share = Math.max(0, Math.min(1, ((door.x - a.x) * dx + (door.y - a.y) * dy) / (dx * dx + dy * dy || 1)));
		return Math.hypot(a.x + share * dx - door.x, a.y + share * dy - door.y) < 1.3;
	});
