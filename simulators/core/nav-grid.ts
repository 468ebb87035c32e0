/** Where a walker of a given size fits, and how far it is to a goal from anywhere. */

import FlatQueue from 'flatqueue';
import type { Floor } from '../../src/lib/domain/floor.ts';
import type { Bounds, Point, Polygon, Ring } from '../../src/lib/domain/geometry/types.ts';
import { createWallGrid, wallsOf, type WallGrid } from './wall-grid.ts';

export interface NavGrid {
	readonly x0: number;
	readonly y0: number;
	/** m */
	readonly cell: number;
	readonly cols: number;
	readonly rows: number;
	/** 1 where the walker's centre may be */
	readonly free: Uint8Array;
	/** Travel cost per metre, ≥ 1: dearer beside walls, so that routes keep to the middle. */
	readonly cost: Float32Array;
	readonly walls: WallGrid;
	/** Cell of a point, −1 outside the grid. */
	index(x: number, y: number): number;
	/** True when the straight line keeps to free cells. */
	isOpen(ax: number, ay: number, bx: number, by: number): boolean;
}

/** How many times farther a metre of shunned floor counts. */
const SHUN = 2.5;

/** Travel cost to the nearest source cell, metres where the floor is open; Infinity where it cannot be reached. */
export type DistanceField = Float32Array;

/**
 * @param clearance m the walker's centre keeps from every wall
 * @param shunned parts of the floor that are crossed only when the way round is much longer
 */
export function createNavGrid(
	floor: Pick<Floor, 'walkable' | 'walls'>,
	clearance: number,
	shunned: readonly Bounds[] = [],
	cell = 0.5
): NavGrid {
	const walls = createWallGrid(wallsOf(floor));
	const { minX, minY, maxX, maxY } = walls.bounds;
	const cols = Math.ceil((maxX - minX) / cell);
	const rows = Math.ceil((maxY - minY) / cell);
	const free = new Uint8Array(cols * rows);
	const cost = new Float32Array(cols * rows);
	const inside = rasterise(floor.walkable, minX, minY, cell, cols, rows);
	for (let i = 0; i < free.length; i++) {
		const x = minX + ((i % cols) + 0.5) * cell;
		const y = minY + (Math.floor(i / cols) + 0.5) * cell;
		const gap = walls.distance(x, y);
		free[i] = inside[i] && gap >= clearance ? 1 : 0;
		const shun = shunned.some(({ minX: a, maxX: b, minY: c, maxY: d }) => x > a && x < b && y > c && y < d);
		cost[i] = (1 + Math.max(0, 0.9 - Math.min(gap, 1.5)) * 0.8) * (shun ? SHUN : 1);
	}
	const index = (x: number, y: number) => {
		const col = Math.floor((x - minX) / cell);
		const row = Math.floor((y - minY) / cell);
		return col < 0 || row < 0 || col >= cols || row >= rows ? -1 : row * cols + col;
	};
	function isOpen(ax: number, ay: number, bx: number, by: number): boolean {
		const steps = Math.max(1, Math.ceil(Math.hypot(bx - ax, by - ay) / (cell / 2)));
		for (let i = 0; i <= steps; i++) {
			const at = index(ax + ((bx - ax) * i) / steps, ay + ((by - ay) * i) / steps);
			if (at < 0 || !free[at]) return false;
		}
		return true;
	}
	return { x0: minX, y0: minY, cell, cols, rows, free, cost, walls, index, isOpen };
}

/** 1 for every cell whose centre lies inside the outline and in no hole. */
function rasterise(area: Polygon, x0: number, y0: number, cell: number, cols: number, rows: number): Uint8Array {
	const mask = new Uint8Array(cols * rows);
	for (const [ring, value] of [[area.outer, 1] as const, ...area.holes.map((hole) => [hole, 0] as const)]) {
		const xs = ring.map(([x]) => x);
		const ys = ring.map(([, y]) => y);
		const lastRow = Math.min(rows - 1, Math.floor((Math.max(...ys) - y0) / cell));
		const lastCol = Math.min(cols - 1, Math.floor((Math.max(...xs) - x0) / cell));
		for (let row = Math.max(0, Math.floor((Math.min(...ys) - y0) / cell)); row <= lastRow; row++) {
			for (let col = Math.max(0, Math.floor((Math.min(...xs) - x0) / cell)); col <= lastCol; col++) {
				if (isInsideRing(ring, x0 + (col + 0.5) * cell, y0 + (row + 0.5) * cell)) mask[row * cols + col] = value;
			}
		}
	}
	return mask;
}

/** The free cell nearest to a point, as a point at its centre; null when there is none within 3 m. */
export function nearestFree(grid: NavGrid, x: number, y: number): Point | null {
	const at = grid.index(x, y);
	if (at >= 0 && grid.free[at]) return { x, y };
	let best: Point | null = null;
	let least = 3;
	const reach = Math.ceil(3 / grid.cell);
	const col = Math.floor((x - grid.x0) / grid.cell);
	const row = Math.floor((y - grid.y0) / grid.cell);
	for (let r = Math.max(0, row - reach); r <= Math.min(grid.rows - 1, row + reach); r++) {
		for (let c = Math.max(0, col - reach); c <= Math.min(grid.cols - 1, col + reach); c++) {
			if (!grid.free[r * grid.cols + c]) continue;
			const point = { x: grid.x0 + (c + 0.5) * grid.cell, y: grid.y0 + (r + 0.5) * grid.cell };
			const away = Math.hypot(point.x - x, point.y - y);
			if (away < least) [least, best] = [away, point];
		}
	}
	return best;
}

/** Cells round a single goal whose distance is taken as the crow flies. */
const EXACT_CELLS = 6;

/**
 * Distance field by fast marching (Sethian 1996, *A fast marching level set method for monotonically advancing fronts*;
 * from memory): first-order upwind solution of |∇u| = cost, so walkers do not zigzag along the grid's eight directions.
 */
export function computeDistanceField(grid: NavGrid, sources: readonly Point[]): DistanceField {
	const { cols, rows, free, cost, cell } = grid;
	const field = new Float32Array(cols * rows).fill(Infinity);
	const settled = new Uint8Array(cols * rows);
	const queue = new FlatQueue<number>();
	// A region is its cells; a single goal starts with exact distances round it, where the scheme is at its worst.
	for (const source of sources) {
		const open = nearestFree(grid, source.x, source.y);
		if (!open) continue;
		const reach = sources.length === 1 ? EXACT_CELLS : 0;
		const col = Math.floor((open.x - grid.x0) / cell);
		const row = Math.floor((open.y - grid.y0) / cell);
		for (let r = Math.max(0, row - reach); r <= Math.min(rows - 1, row + reach); r++) {
			for (let c = Math.max(0, col - reach); c <= Math.min(cols - 1, col + reach); c++) {
				const at = r * cols + c;
				const x = grid.x0 + (c + 0.5) * cell;
				const y = grid.y0 + (r + 0.5) * cell;
				if (!free[at] || (reach > 0 && !grid.isOpen(open.x, open.y, x, y))) continue;
				const away = reach > 0 ? Math.hypot(x - open.x, y - open.y) : 0;
				if (away >= field[at]!) continue;
				field[at] = away;
				queue.push(at, away);
			}
		}
	}
	const known = (i: number) => (settled[i] ? field[i]! : Infinity);
	for (let at = queue.pop(); at !== undefined; at = queue.pop()) {
		if (settled[at]) continue;
		settled[at] = 1;
		const col = at % cols;
		for (let side = 0; side < 4; side++) {
			const next =
				side === 0
					? col > 0
						? at - 1
						: -1
					: side === 1
						? col < cols - 1
							? at + 1
							: -1
						: side === 2
							? at - cols
							: at + cols;
			if (next < 0 || next >= cols * rows || settled[next] || !free[next]) continue;
			const c = next % cols;
			const a = Math.min(c > 0 ? known(next - 1) : Infinity, c < cols - 1 ? known(next + 1) : Infinity);
			const b = Math.min(
				next >= cols ? known(next - cols) : Infinity,
				next < cols * (rows - 1) ? known(next + cols) : Infinity
			);
			const h = cost[next]! * cell;
			const gap = Math.abs(a - b);
			const value = gap >= h ? Math.min(a, b) + h : (a + b + Math.sqrt(2 * h * h - gap * gap)) / 2;
			if (value < field[next]!) {
				field[next] = value;
				queue.push(next, value);
			}
		}
	}
	return field;
}

/** Distance at a point, interpolated over the reachable cells round it; Infinity off the field. */
export function distanceAt(grid: NavGrid, field: DistanceField, x: number, y: number): number {
	const gx = (x - grid.x0) / grid.cell - 0.5;
	const gy = (y - grid.y0) / grid.cell - 0.5;
	const c0 = Math.floor(gx);
	const r0 = Math.floor(gy);
	let sum = 0;
	let weights = 0;
	for (let r = r0; r <= r0 + 1; r++) {
		for (let c = c0; c <= c0 + 1; c++) {
			if (c < 0 || r < 0 || c >= grid.cols || r >= grid.rows) continue;
			const value = field[r * grid.cols + c]!;
			if (value === Infinity) continue;
			const weight = (1 - Math.abs(gx - c)) * (1 - Math.abs(gy - r));
			sum += weight * value;
			weights += weight;
		}
	}
	return weights > 1e-9 ? sum / weights : Infinity;
}

/**
 * Corner points of a way down the field, start and goal included, shortened wherever the straight line is open.
 * Null when the goal cannot be reached from here.
 */
export function findRoute(grid: NavGrid, field: DistanceField, from: Point, goal: Point): Point[] | null {
	const start = nearestFree(grid, from.x, from.y);
	let at = start ? grid.index(start.x, start.y) : -1;
	if (at < 0 || field[at] === Infinity) return null;
	const cells: Point[] = [{ x: from.x, y: from.y }];
	const { cols, rows } = grid;
	while (field[at]! > 0) {
		let next = at;
		const col = at % cols;
		const row = Math.floor(at / cols);
		for (let r = Math.max(0, row - 1); r <= Math.min(rows - 1, row + 1); r++) {
			for (let c = Math.max(0, col - 1); c <= Math.min(cols - 1, col + 1); c++) {
				if (field[r * cols + c]! < field[next]!) next = r * cols + c;
			}
		}
		if (next === at) break;
		at = next;
		cells.push({
			x: grid.x0 + ((at % cols) + 0.5) * grid.cell,
			y: grid.y0 + (Math.floor(at / cols) + 0.5) * grid.cell
		});
	}
	cells.push(goal);
	return shorten(grid, cells);
}

function shorten(grid: NavGrid, points: readonly Point[]): Point[] {
	const kept: Point[] = [points[0]!];
	let from = 0;
	while (from < points.length - 1) {
		let to = from + 1;
		// 30 cells: beyond that a straight line would give up the distance kept from walls on a bend.
		for (let far = Math.min(points.length - 1, from + 30); far > to; far--) {
			if (grid.isOpen(points[from]!.x, points[from]!.y, points[far]!.x, points[far]!.y)) to = far;
		}
		kept.push(points[to]!);
		from = to;
	}
	return kept;
}

export function isInsideRing(ring: Ring, x: number, y: number): boolean {
	let inside = false;
	for (let i = 0, j = ring.length - 1; i < ring.length; j = i++) {
		const [xi, yi] = ring[i]!;
		const [xj, yj] = ring[j]!;
		if (yi > y !== yj > y && x < ((xj - xi) * (y - yi)) / (yj - yi) + xi) inside = !inside;
	}
	return inside;
}
