/** Movement between samples: straight and at constant speed, so distances and durations are exact, not sampled. */

import type { Point } from '../geometry/types.ts';

/** Position in m at a time in s. A path is a list of these with rising times. */
export interface TimedPoint extends Point {
	readonly time: number;
}

/** A stretch of time in which both movers go straight: position of the second seen from the first at its ends, m. */
export interface Stretch {
	readonly from: number;
	readonly to: number;
	readonly start: Point;
	readonly end: Point;
}

/** Half-open share of a stretch, 0…1 */
export type Share = readonly [from: number, to: number];

/** Stretches while both paths exist, in order; none when they never do at the same time. */
export function pairStretches(a: readonly TimedPoint[], b: readonly TimedPoint[]): Stretch[] {
	const [firstA, lastA, firstB, lastB] = [a[0], a[a.length - 1], b[0], b[b.length - 1]];
	if (!firstA || !lastA || !firstB || !lastB) return [];
	const from = Math.max(firstA.time, firstB.time);
	const to = Math.min(lastA.time, lastB.time);
	if (!(to > from)) return [];
	const inside = [...a, ...b].map(({ time }) => time).filter((time) => time > from && time < to);
	const times = [...new Set([from, ...inside, to])].sort((x, y) => x - y);
	const seen = times.map((time) => {
		const p = positionAt(a, time);
		const q = positionAt(b, time);
		return { x: q.x - p.x, y: q.y - p.y };
	});
	return times.slice(1).map((time, i) => ({ from: times[i]!, to: time, start: seen[i]!, end: seen[i + 1]! }));
}

/** Position at a time, m; before the first and after the last sample, that sample. The path must not be empty. */
export function positionAt(path: readonly TimedPoint[], time: number): Point {
	let low = 0;
	let high = path.length - 1;
	if (time <= path[low]!.time) return path[low]!;
	if (time >= path[high]!.time) return path[high]!;
	while (high - low > 1) {
		const middle = (low + high) >> 1;
		if (path[middle]!.time <= time) low = middle;
		else high = middle;
	}
	const a = path[low]!;
	const b = path[high]!;
	const share = (time - a.time) / (b.time - a.time);
	return { x: a.x + share * (b.x - a.x), y: a.y + share * (b.y - a.y) };
}

/** Least distance from the origin on the way from start to end, m, and the share of the way where it is reached. */
export function computeClosest(start: Point, end: Point): { distance: number; share: number } {
	const dx = end.x - start.x;
	const dy = end.y - start.y;
	const square = dx * dx + dy * dy;
	const share = square === 0 ? 0 : Math.min(1, Math.max(0, -(start.x * dx + start.y * dy) / square));
	return { distance: Math.hypot(start.x + share * dx, start.y + share * dy), share };
}

/** Part of the way from start to end nearer to the origin than `radius` m (strictly); null when none is. */
export function computeNearerThan(start: Point, end: Point, radius: number): Share | null {
	const dx = end.x - start.x;
	const dy = end.y - start.y;
	const a = dx * dx + dy * dy;
	const b = start.x * dx + start.y * dy;
	const c = start.x * start.x + start.y * start.y - radius * radius;
	if (a < 1e-300) return c < 0 ? [0, 1] : null;
	const discriminant = b * b - a * c;
	if (discriminant <= 0) return null;
	const root = Math.sqrt(discriminant);
	const from = Math.max(0, (-b - root) / a);
	const to = Math.min(1, (-b + root) / a);
	return to > from ? [from, to] : null;
}

/** Length of the union of intervals. */
export function computeUnionLength(intervals: readonly (readonly [from: number, to: number])[]): number {
	const sorted = [...intervals].sort((a, b) => a[0] - b[0]);
	let total = 0;
	let end = -Infinity;
	for (const [from, to] of sorted) {
		if (to > end) total += to - Math.max(from, end);
		end = Math.max(end, to);
	}
	return total;
}
