/**
 * Best velocities under half-planes and a speed limit. The optimum of such a small problem lies at a crossing of two
 * boundaries (or at a foot point), so all are tried.
 */

import type { Point } from '../geometry/types.ts';

/** Permitted are the velocities w with (w − point)·normal ≥ 0; normal is a unit vector. */
interface Constraint {
	readonly point: Point;
	readonly normal: Point;
}

/** Boundary line n·w = c */
interface Line {
	readonly x: number;
	readonly y: number;
	readonly c: number;
}

/** m/s by which a velocity may violate a half-plane through rounding */
const ROUNDING = 1e-10;

/** Greatest progress along the unit vector `direction`, m/s, and its velocity (null when several have it); null when infeasible. */
export function findBestProgress(
	constraints: readonly Constraint[],
	direction: Point,
	maxSpeed: number
): { progress: number; velocity: Point | null } | null {
	const lines = constraints.map(toLine);
	const fast = { x: maxSpeed * direction.x, y: maxSpeed * direction.y };
	const permitted = [...crossings(lines, maxSpeed), fast].filter((w) => isPermitted(w, lines, maxSpeed));
	if (permitted.length === 0) return null;
	const progressOf = (w: Point) => w.x * direction.x + w.y * direction.y;
	const progress = permitted.reduce((best, w) => Math.max(best, progressOf(w)), -Infinity);
	const best = permitted.filter((w) => progressOf(w) >= progress - 1e-9);
	const [first, ...others] = best;
	const alone = others.every((w) => Math.hypot(w.x - first!.x, w.y - first!.y) < 1e-7);
	return { progress, velocity: alone ? first! : null };
}

/** The permitted velocity nearest to the preferred one; null when infeasible. */
export function findNearest(constraints: readonly Constraint[], preferred: Point, maxSpeed: number): Point | null {
	const lines = constraints.map(toLine);
	const speed = Math.hypot(preferred.x, preferred.y);
	const slower = speed <= maxSpeed ? 1 : maxSpeed / speed;
	const candidates = [...crossings(lines, maxSpeed), { x: preferred.x * slower, y: preferred.y * slower }];
	for (const { x, y, c } of lines) {
		const short = c - (preferred.x * x + preferred.y * y);
		candidates.push({ x: preferred.x + short * x, y: preferred.y + short * y });
	}
	const distance = (w: Point) => Math.hypot(w.x - preferred.x, w.y - preferred.y);
	let nearest: Point | null = null;
	for (const w of candidates) {
		if ((!nearest || distance(w) < distance(nearest)) && isPermitted(w, lines, maxSpeed)) nearest = w;
	}
	return nearest;
}

/**
 * Least greatest violation of any half-plane by a velocity within the speed limit, m/s; negative when there is slack.
 * The optimum violates three half-planes alike, or two or one at full speed.
 */
export function findLeastViolation(constraints: readonly Constraint[], maxSpeed: number): number {
	const lines = constraints.map(toLine);
	let least = Infinity;
	const offer = (x: number, y: number) => {
		if (Math.hypot(x, y) > maxSpeed + ROUNDING) return;
		let worst = -Infinity;
		for (const line of lines) {
			worst = Math.max(worst, line.c - line.x * x - line.y * y);
			if (worst >= least) return;
		}
		least = worst;
	};
	offer(0, 0);
	lines.forEach((a, i) => {
		offer(maxSpeed * a.x, maxSpeed * a.y);
		const alike = lines.slice(0, i).flatMap((b) => difference(a, b));
		for (const w of alike.flatMap((line) => onCircle(line, maxSpeed))) offer(w.x, w.y);
		alike.forEach((line, j) => {
			for (const other of alike.slice(0, j)) {
				const w = crossing(line, other);
				if (w) offer(w.x, w.y);
			}
		});
	});
	return least;
}

/**
 * Greatest progress on a square grid of velocities, m/s: a lower bound of `findBestProgress` that shares none of its
 * geometry. Null when no grid point is permitted. Cost: one column of the grid at a time, 2·maxSpeed/step + 1 of them.
 *
 * @param step grid spacing, m/s
 */
export function computeGridProgress(
	constraints: readonly Constraint[],
	direction: Point,
	maxSpeed: number,
	step: number
): number | null {
	const most = Math.ceil(maxSpeed / step);
	let best: number | null = null;
	for (let i = -most; i <= most; i++) {
		const x = i * step;
		const permits = (j: number) =>
			x * x + (j * step) ** 2 <= maxSpeed * maxSpeed &&
			constraints.every(({ point, normal }) => (x - point.x) * normal.x + (j * step - point.y) * normal.y >= 0);
		const [from, to] = column(constraints, x, maxSpeed);
		// Progress along a column is linear, so its best is at the end the direction points to.
		const up = direction.y >= 0;
		let j = up ? Math.min(most, Math.ceil(to / step) + 1) : Math.max(-most, Math.floor(from / step) - 1);
		const stop = up ? Math.max(-most, Math.floor(from / step) - 1) : Math.min(most, Math.ceil(to / step) + 1);
		while ((up ? j >= stop : j <= stop) && !permits(j)) j += up ? -1 : 1;
		if (up ? j < stop : j > stop) continue;
		best = Math.max(best ?? -Infinity, x * direction.x + j * step * direction.y);
	}
	return best;
}

/** Permitted range of y at x, a little too wide if anything; empty ranges have from > to. */
function column(constraints: readonly Constraint[], x: number, maxSpeed: number): [from: number, to: number] {
	const half = Math.sqrt(Math.max(0, maxSpeed * maxSpeed - x * x));
	let from = -half;
	let to = half;
	for (const { point, normal } of constraints) {
		if (Math.abs(normal.y) < 1e-12) continue;
		const y = point.y - ((x - point.x) * normal.x) / normal.y;
		if (normal.y > 0) from = Math.max(from, y);
		else to = Math.min(to, y);
	}
	return [from, to];
}

const toLine = ({ point, normal }: Constraint): Line => ({
	x: normal.x,
	y: normal.y,
	c: point.x * normal.x + point.y * normal.y
});

function isPermitted(w: Point, lines: readonly Line[], maxSpeed: number): boolean {
	return Math.hypot(w.x, w.y) <= maxSpeed + ROUNDING && lines.every(({ x, y, c }) => w.x * x + w.y * y >= c - ROUNDING);
}

/** Crossings of the lines with each other and with the circle of full speed. */
function crossings(lines: readonly Line[], maxSpeed: number): Point[] {
	return lines.flatMap((line, i) => [
		...onCircle(line, maxSpeed),
		...lines.slice(0, i).flatMap((other) => crossing(line, other) ?? [])
	]);
}

function onCircle({ x, y, c }: Line, radius: number): Point[] {
	if (Math.abs(c) > radius) return [];
	const half = Math.sqrt(Math.max(0, radius * radius - c * c));
	return [
		{ x: c * x - half * y, y: c * y + half * x },
		{ x: c * x + half * y, y: c * y - half * x }
	];
}

function crossing(a: Line, b: Line): Point | null {
	const turn = a.x * b.y - a.y * b.x;
	if (Math.abs(turn) <= 1e-12) return null;
	return { x: (a.c * b.y - b.c * a.y) / turn, y: (a.x * b.c - b.x * a.c) / turn };
}

/** The line of velocities that violate both half-planes alike; none for equal normals. */
function difference(a: Line, b: Line): Line[] {
	const length = Math.hypot(a.x - b.x, a.y - b.y);
	return length > 1e-12 ? [{ x: (a.x - b.x) / length, y: (a.y - b.y) / length, c: (a.c - b.c) / length }] : [];
}
