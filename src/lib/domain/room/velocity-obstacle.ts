/**
 * Truncated velocity obstacles of people and walls, and how deep a velocity lies inside one.
 *
 * Velocity obstacle: Fiorini & Shiller 1998, Motion planning in dynamic environments using velocity obstacles; truncated at
 * a horizon: van den Berg, Guy, Lin & Manocha 2011, Reciprocal n-body collision avoidance (both from memory). The depth, and
 * the rule for discs that touch already, are our definitions.
 */

import type { Segment } from '../geometry/types.ts';

/** A moving disc seen from the robot, which stands at the origin. Metres, m/s. */
export interface MovingDisc {
	readonly x: number;
	readonly y: number;
	readonly vx: number;
	readonly vy: number;
	/** m, radius of the robot plus radius of the person */
	readonly reach: number;
	/** m/s by which the person may change velocity to let the robot pass */
	readonly flexibility: number;
}

/** Obstacles as rows of `STRIDE` numbers, see the offsets below. */
export interface Obstacles {
	readonly rows: Float64Array;
	readonly count: number;
	/** s */
	readonly horizon: number;
}

export const STRIDE = 16;
/** Offsets in a row. N1 and N2 are the outward normals of the two legs; N1 of a touching obstacle points at it. */
export const KIND = 0;
export const AX = 1;
export const AY = 2;
export const BX = 3;
export const BY = 4;
export const VX = 5;
export const VY = 6;
export const R = 7;
export const FLEX = 8;
export const N1X = 9;
export const N1Y = 10;
export const N2X = 11;
export const N2Y = 12;
/** Unit normal of a wall */
export const FX = 13;
export const FY = 14;

export const DISC = 0;
const WALL = 1;
export const TOUCHING = 2;

/**
 * Obstacles that can matter to a robot of `radius` m that drives at up to `maxSpeed` m/s, nearest first; the rest is left out.
 * Walls have no thickness and never yield. Coincident centres constrain nothing: no direction is closer.
 */
export function buildObstacles(
	discs: readonly MovingDisc[],
	walls: readonly Segment[],
	{ radius, maxSpeed, horizon }: { readonly radius: number; readonly maxSpeed: number; readonly horizon: number }
): Obstacles {
	const loose: { distance: number; row: Float64Array }[] = [];
	const keep = (distance: number, row: Float64Array | null) => {
		if (row && (row[KIND] === TOUCHING || signedDepth(row, 0, 0, 0, horizon, -Infinity) > -maxSpeed)) {
			loose.push({ distance, row });
		}
	};
	for (const disc of discs) {
		const distance = Math.hypot(disc.x, disc.y);
		if (distance - disc.reach > (Math.hypot(disc.vx, disc.vy) + maxSpeed) * horizon) continue;
		keep(distance - disc.reach, discRow(disc, distance));
	}
	for (const wall of walls) {
		const near = nearestOnWall(wall);
		const distance = Math.hypot(near.x, near.y);
		if (distance - radius > maxSpeed * horizon) continue;
		keep(distance - radius, wallRow(wall, radius, near, distance));
	}
	loose.sort((a, b) => a.distance - b.distance);
	const rows = new Float64Array(loose.length * STRIDE);
	loose.forEach(({ row }, i) => rows.set(row, i * STRIDE));
	return { rows, count: loose.length, horizon };
}

function discRow({ x, y, vx, vy, reach, flexibility }: MovingDisc, distance: number): Float64Array | null {
	if (distance === 0) return null;
	const row = new Float64Array(STRIDE);
	row.set([DISC, x, y, x, y, vx, vy, reach, flexibility]);
	if (distance <= reach) touch(row, x / distance, y / distance);
	else {
		setLeg(row, N1X, x, y, distance, reach, 1);
		setLeg(row, N2X, x, y, distance, reach, -1);
	}
	return row;
}

function wallRow({ ax, ay, bx, by }: Segment, r: number, near: { x: number; y: number }, distance: number) {
	if (distance === 0) return null;
	const row = new Float64Array(STRIDE);
	row.set([WALL, ax, ay, bx, by, 0, 0, r, 0]);
	if (distance <= r) return touch(row, near.x / distance, near.y / distance);
	setWallLeg(row, N1X, 1);
	setWallLeg(row, N2X, -1);
	const length = Math.hypot(bx - ax, by - ay);
	if (length > 0) {
		row[FX] = (ay - by) / length;
		row[FY] = (bx - ax) / length;
	}
	return row;
}

function touch(row: Float64Array, towardsX: number, towardsY: number): Float64Array {
	row[KIND] = TOUCHING;
	row[N1X] = towardsX;
	row[N1Y] = towardsY;
	return row;
}

/** Outward normal of the left (side 1) or right (side −1) tangent from the origin to a disc. */
function setLeg(row: Float64Array, at: number, x: number, y: number, distance: number, r: number, side: number): void {
	const sin = r / distance;
	const cos = side * Math.sqrt(1 - sin * sin);
	row[at] = (-sin * x - cos * y) / distance;
	row[at + 1] = (-sin * y + cos * x) / distance;
}

/** Of the tangents to the two ends of a wall, the outer one: it has the other end on its inner side. */
function setWallLeg(row: Float64Array, at: number, side: number): void {
	const [ax, ay, bx, by, r] = [row[AX]!, row[AY]!, row[BX]!, row[BY]!, row[R]!];
	setLeg(row, at, ax, ay, Math.hypot(ax, ay), r, side);
	if (row[at]! * bx + row[at + 1]! * by > -r) setLeg(row, at, bx, by, Math.hypot(bx, by), r, side);
}

function nearestOnWall({ ax, ay, bx, by }: Segment): { x: number; y: number } {
	const ex = bx - ax;
	const ey = by - ay;
	const square = ex * ex + ey * ey;
	const share = square > 0 ? Math.min(1, Math.max(0, -(ax * ex + ay * ey) / square)) : 0;
	return { x: ax + share * ex, y: ay + share * ey };
}

/**
 * Signed depth in m/s of the robot velocity (wx, wy) in the obstacle that starts at `at` in `rows`: how far the nearest way
 * out is; negative outside, where its size is at most the distance. Returns early with any value ≤ `enough`.
 *
 * The obstacle is convex, so the depth is the least of support(n) − n·w over outward normals n. The least is found at a
 * leg (support 0), at the normal through the nearest arc, or at a wall's face.
 */
export function signedDepth(
	rows: Float64Array,
	at: number,
	wx: number,
	wy: number,
	horizon: number,
	enough: number
): number {
	const x = wx - rows[at + VX]!;
	const y = wy - rows[at + VY]!;
	if (rows[at + KIND] === TOUCHING) return x * rows[at + N1X]! + y * rows[at + N1Y]!;

	let depth = -(x * rows[at + N1X]! + y * rows[at + N1Y]!);
	if (depth <= enough) return depth;
	depth = Math.min(depth, -(x * rows[at + N2X]! + y * rows[at + N2Y]!));
	if (depth <= enough) return depth;

	const r = rows[at + R]!;
	const ax = rows[at + AX]!;
	const ay = rows[at + AY]!;
	if (rows[at + KIND] === DISC) {
		const qx = x - ax / horizon;
		const qy = y - ay / horizon;
		const q = Math.sqrt(qx * qx + qy * qy);
		return qx * ax + qy * ay <= -r * q ? Math.min(depth, r / horizon - q) : depth;
	}
	const bx = rows[at + BX]!;
	const by = rows[at + BY]!;
	depth = Math.min(depth, wallCap(x - ax / horizon, y - ay / horizon, ax, ay, bx, by, r, x, y, horizon));
	depth = Math.min(depth, wallCap(x - bx / horizon, y - by / horizon, ax, ay, bx, by, r, x, y, horizon));
	const fx = rows[at + FX]!;
	const fy = rows[at + FY]!;
	depth = Math.min(depth, wallCap(fx, fy, ax, ay, bx, by, r, x, y, horizon));
	return Math.min(depth, wallCap(-fx, -fy, ax, ay, bx, by, r, x, y, horizon));
}

/** support(n) − n·(x, y) of a wall for the direction (nx, ny) of any length; Infinity where the cut-off end has no such normal. */
function wallCap(
	nx: number,
	ny: number,
	ax: number,
	ay: number,
	bx: number,
	by: number,
	r: number,
	x: number,
	y: number,
	horizon: number
): number {
	const length = Math.sqrt(nx * nx + ny * ny);
	if (length === 0) return Infinity;
	const toA = (nx * ax + ny * ay) / length;
	const toB = (nx * bx + ny * by) / length;
	if (toA > -r || toB > -r) return Infinity;
	return (Math.max(toA, toB) + r) / horizon - (nx * x + ny * y) / length;
}

/**
 * Penetration depth in m/s: the least change of a person's velocity that keeps two discs from coming into contact within
 * the horizon; 0 when they do not. Discs that touch or overlap already: the speed at which they come closer.
 *
 * @param relative position of the person seen from the robot, m
 * @param reach sum of the radii, m
 * @param horizon s, > 0
 */
export function computePenetration(
	relative: { readonly x: number; readonly y: number },
	robotVelocity: { readonly x: number; readonly y: number },
	personVelocity: { readonly x: number; readonly y: number },
	reach: number,
	horizon: number
): number {
	const disc = { ...relative, vx: personVelocity.x, vy: personVelocity.y, reach, flexibility: 0 };
	const row = discRow(disc, Math.hypot(relative.x, relative.y));
	return row ? Math.max(0, signedDepth(row, 0, robotVelocity.x, robotVelocity.y, horizon, 0)) : 0;
}
