/**
 * The exact search behind room to move: the robot's best velocity lies at full speed straight ahead or where two boundaries
 * cross (people and walls shrunk by flexibility, top speed, edges of the sector). A polar grid gives a lower bound first, so
 * that only boundaries and crossings beyond it are looked at.
 *
 * Candidates are tried as they come and only when better than the best so far, which finds the same maximum as sorting them.
 */

import { ARC, collectCurves, LINE, type Curves } from './room-curves.ts';
import { FLEX, signedDepth, STRIDE, type Obstacles } from './velocity-obstacle.ts';

/** Best velocity in the frame with the goal along +x; speed = max(0, x). */
export interface Room {
	readonly speed: number;
	readonly x: number;
	readonly y: number;
}

export interface RoomLimits {
	/** m/s */
	readonly maxSpeed: number;
	/** rad to either side of +x */
	readonly sector: number;
}

/** m/s by which a crossing may lie inside an obstacle through rounding. */
const ROUNDING = 1e-8;
const SPEEDS = 16;
const HEADINGS = 31;

/**
 * Greatest x of a velocity within the limits that no obstacle blocks, never below `atLeast.speed`.
 *
 * @param scale factor on every flexibility: 0 asks for room alone, 1 for room shared
 * @param atLeast a velocity known to pass
 */
export function findRoom(
	obstacles: Obstacles,
	limits: RoomLimits,
	scale: number,
	atLeast: Room = { speed: 0, x: 0, y: 0 }
): Room {
	const { maxSpeed } = limits;
	// Beyond a right angle there is no progress to be found.
	const sector = Math.min(limits.sector, Math.PI / 2);
	if (!(maxSpeed > 0)) return { speed: 0, x: 0, y: 0 };
	const search = new Search(obstacles, { maxSpeed, sector }, scale, atLeast);
	if (search.offer(maxSpeed, 0)) return search.best();
	searchGrid(search, maxSpeed, sector);
	searchCrossings(search, collectCurves(obstacles, { maxSpeed, sector }, scale, search.bestX));
	return search.best();
}

class Search {
	bestX: number;
	bestY: number;
	private lastBlocker = 0;
	private readonly speedSquare: number;
	private readonly cos: number;
	private readonly sin: number;

	constructor(
		private readonly obstacles: Obstacles,
		limits: RoomLimits,
		private readonly scale: number,
		atLeast: Room
	) {
		this.bestX = atLeast.x;
		this.bestY = atLeast.y;
		this.speedSquare = (limits.maxSpeed + 1e-9) ** 2;
		this.cos = Math.cos(limits.sector);
		this.sin = Math.sin(limits.sector);
	}

	/** Takes the velocity if it is better than the best so far, within the limits and blocked by nobody. */
	offer(x: number, y: number): boolean {
		if (!(x > this.bestX) || x * x + y * y > this.speedSquare) return false;
		if (Math.abs(y) * this.cos > x * this.sin + 1e-9) return false;
		const { rows, count, horizon } = this.obstacles;
		// Neighbouring velocities are mostly blocked by the same obstacle.
		if (count > 0 && this.blocks(rows, this.lastBlocker, x, y, horizon)) return false;
		for (let at = 0; at < count * STRIDE; at += STRIDE) {
			if (this.blocks(rows, at, x, y, horizon)) {
				this.lastBlocker = at;
				return false;
			}
		}
		this.bestX = x;
		this.bestY = y;
		return true;
	}

	best(): Room {
		return { speed: Math.max(0, this.bestX), x: this.bestX, y: this.bestY };
	}

	private blocks(rows: Float64Array, at: number, x: number, y: number, horizon: number): boolean {
		const allowed = this.scale * rows[at + FLEX]! + ROUNDING;
		return signedDepth(rows, at, x, y, horizon, allowed) > allowed;
	}
}

function searchGrid(search: Search, maxSpeed: number, sector: number): void {
	for (let i = SPEEDS; i > 0; i--) {
		const speed = (maxSpeed * i) / SPEEDS;
		if (speed <= search.bestX) return;
		// From straight ahead outwards: the first that passes is the best of its speed on that side.
		const half = (HEADINGS - 1) / 2;
		for (let j = 0; j <= half; j++) {
			const heading = (sector * j) / half;
			const x = speed * Math.cos(heading);
			if (x <= search.bestX) break;
			const y = speed * Math.sin(heading);
			if (search.offer(x, y) || search.offer(x, -y)) break;
		}
	}
}

function searchCrossings(search: Search, { lines, arcs }: Curves): void {
	for (let i = 0; i < lines.length; i += LINE) {
		if (lines[i + 5]! <= search.bestX) continue;
		for (let j = 0; j < i; j += LINE) crossLines(search, lines, i, j);
		for (let j = 0; j < arcs.length; j += ARC) crossLineArc(search, lines, i, arcs, j);
	}
	for (let i = 0; i < arcs.length; i += ARC) {
		for (let j = 0; j < i; j += ARC) crossArcs(search, arcs, i, j);
	}
}

function crossLines(search: Search, lines: Float64Array, i: number, j: number): void {
	if (lines[j + 5]! <= search.bestX) return;
	const nx = lines[i]!;
	const ny = lines[i + 1]!;
	const c = lines[i + 2]!;
	const mx = lines[j]!;
	const my = lines[j + 1]!;
	const turn = nx * my - ny * mx;
	if (Math.abs(turn) <= 1e-13) return;
	const cos = nx * mx + ny * my;
	const t = (lines[j + 2]! - c * cos) / turn;
	if (t < lines[i + 3]! || t > lines[i + 4]!) return;
	const s = (lines[j + 2]! * cos - c) / turn;
	if (s < lines[j + 3]! || s > lines[j + 4]!) return;
	search.offer(c * nx - t * ny, c * ny + t * nx);
}

function crossLineArc(search: Search, lines: Float64Array, i: number, arcs: Float64Array, j: number): void {
	const nx = lines[i]!;
	const ny = lines[i + 1]!;
	const c = lines[i + 2]!;
	const offset = c - nx * arcs[j]! - ny * arcs[j + 1]!;
	const square = arcs[j + 2]! * arcs[j + 2]! - offset * offset;
	if (square < 0) return;
	const middle = nx * arcs[j + 1]! - ny * arcs[j]!;
	const half = Math.sqrt(square);
	for (let side = -1; side <= 1; side += 2) {
		const t = middle + side * half;
		if (t < lines[i + 3]! || t > lines[i + 4]!) continue;
		const x = c * nx - t * ny;
		const y = c * ny + t * nx;
		if (x > search.bestX && isOnArc(arcs, j, x, y)) search.offer(x, y);
	}
}

function crossArcs(search: Search, arcs: Float64Array, i: number, j: number): void {
	const ex = arcs[j]! - arcs[i]!;
	const ey = arcs[j + 1]! - arcs[i + 1]!;
	const q = arcs[i + 2]!;
	const square = ex * ex + ey * ey;
	const sum = q + arcs[j + 2]!;
	if (square > sum * sum || square <= 1e-26) return;
	const apart = Math.sqrt(square);
	const along = (square + q * q - arcs[j + 2]! * arcs[j + 2]!) / (2 * apart);
	const rest = q * q - along * along;
	if (rest < 0) return;
	const half = Math.sqrt(rest);
	for (let side = -1; side <= 1; side += 2) {
		const x = arcs[i]! + (along * ex - side * half * ey) / apart;
		const y = arcs[i + 1]! + (along * ey + side * half * ex) / apart;
		if (x > search.bestX && isOnArc(arcs, i, x, y) && isOnArc(arcs, j, x, y)) search.offer(x, y);
	}
}

/** Only the side of a circle that faces the robot bounds an obstacle. */
function isOnArc(arcs: Float64Array, at: number, x: number, y: number): boolean {
	return (x - arcs[at]!) * arcs[at + 3]! + (y - arcs[at + 1]!) * arcs[at + 4]! <= arcs[at + 5]!;
}
