/** Walls of a floor sorted into square cells, so that a walker asks only about the few near it. */

import type { Bounds, Segment } from '../../src/lib/domain/geometry/types.ts';
import type { Floor } from '../../src/lib/domain/floor.ts';

const CELL = 1;
/** m; a cell lists every wall that comes this close to any of its points. */
const REACH = 1;

export interface WallGrid {
	readonly bounds: Bounds;
	/** Four numbers per wall: ax, ay, bx, by. */
	readonly walls: Float64Array;
	/** Index of the cell that holds a point; points outside belong to the nearest cell. */
	cellAt(x: number, y: number): number;
	/** First entry of a cell in `items`; the cell ends where the next begins. */
	readonly start: Int32Array;
	/** Wall numbers, cell by cell. */
	readonly items: Int32Array;
	/** True when the straight line from a to b crosses or touches a wall. */
	isBlocked(ax: number, ay: number, bx: number, by: number): boolean;
	/** Distance to the nearest wall, m; `REACH` or more is reported as Infinity. */
	distance(x: number, y: number): number;
}

/** All walls of a floor: the outer line, the edges of its holes and the inner walls. */
export function wallsOf(floor: Pick<Floor, 'walkable' | 'walls'>): Segment[] {
	const rings = [floor.walkable.outer, ...floor.walkable.holes];
	const edges = rings.flatMap((ring) =>
		ring.map(([ax, ay], i) => {
			const [bx, by] = ring[(i + 1) % ring.length]!;
			return { ax, ay, bx, by };
		})
	);
	return [...edges, ...floor.walls];
}

export function createWallGrid(segments: readonly Segment[]): WallGrid {
	const walls = new Float64Array(segments.flatMap(({ ax, ay, bx, by }) => [ax, ay, bx, by]));
	const bounds = boundsOfWalls(walls);
	const cols = Math.max(1, Math.ceil((bounds.maxX - bounds.minX) / CELL));
	const rows = Math.max(1, Math.ceil((bounds.maxY - bounds.minY) / CELL));
	const lists: number[][] = Array.from({ length: cols * rows }, () => []);
	const near = REACH + CELL * Math.SQRT1_2;
	for (let row = 0; row < rows; row++) {
		for (let col = 0; col < cols; col++) {
			const x = bounds.minX + (col + 0.5) * CELL;
			const y = bounds.minY + (row + 0.5) * CELL;
			for (let w = 0; w < segments.length; w++) {
				if (distanceToWall(walls, w, x, y) <= near) lists[row * cols + col]!.push(w);
			}
		}
	}
	const start = new Int32Array(lists.length + 1);
	for (let i = 0; i < lists.length; i++) start[i + 1] = start[i]! + lists[i]!.length;
	const items = Int32Array.from(lists.flat());

	const column = (x: number) => Math.min(cols - 1, Math.max(0, Math.floor((x - bounds.minX) / CELL)));
	const line = (y: number) => Math.min(rows - 1, Math.max(0, Math.floor((y - bounds.minY) / CELL)));
	const cellAt = (x: number, y: number) => line(y) * cols + column(x);

	function isBlocked(ax: number, ay: number, bx: number, by: number): boolean {
		// Cells list walls up to REACH away, so looking every REACH along the line misses none.
		const steps = Math.max(1, Math.ceil(Math.hypot(bx - ax, by - ay) / REACH));
		let last = -1;
		for (let i = 0; i < steps; i++) {
			const share = (i + 0.5) / steps;
			const cell = cellAt(ax + (bx - ax) * share, ay + (by - ay) * share);
			if (cell === last) continue;
			last = cell;
			for (let k = start[cell]!; k < start[cell + 1]!; k++) {
				const w = 4 * items[k]!;
				if (cross(ax, ay, bx, by, walls[w]!, walls[w + 1]!, walls[w + 2]!, walls[w + 3]!)) return true;
			}
		}
		return false;
	}

	function distance(x: number, y: number): number {
		const cell = cellAt(x, y);
		let least = Infinity;
		for (let k = start[cell]!; k < start[cell + 1]!; k++) {
			least = Math.min(least, distanceToWall(walls, items[k]!, x, y));
		}
		return least < REACH ? least : Infinity;
	}

	return { bounds, walls, cellAt, start, items, isBlocked, distance };
}

function boundsOfWalls(walls: Float64Array): Bounds {
	let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity];
	for (let i = 0; i < walls.length; i += 2) {
		minX = Math.min(minX, walls[i]!);
		maxX = Math.max(maxX, walls[i]!);
		minY = Math.min(minY, walls[i + 1]!);
		maxY = Math.max(maxY, walls[i + 1]!);
	}
	return { minX, minY, maxX, maxY };
}

function distanceToWall(walls: Float64Array, w: number, x: number, y: number): number {
	const ax = walls[4 * w]!;
	const ay = walls[4 * w + 1]!;
	const dx = walls[4 * w + 2]! - ax;
	const dy = walls[4 * w + 3]! - ay;
	const length2 = dx * dx + dy * dy;
	const share = length2 > 0 ? Math.min(1, Math.max(0, ((x - ax) * dx + (y - ay) * dy) / length2)) : 0;
	const ex = x - ax - share * dx;
	const ey = y - ay - share * dy;
	return Math.sqrt(ex * ex + ey * ey);
}

/** Whether two closed segments share a point (orientation test). Collinear overlap counts as not crossing. */
function cross(
	ax: number,
	ay: number,
	bx: number,
	by: number,
	cx: number,
	cy: number,
	dx: number,
	dy: number
): boolean {
	const d1 = (bx - ax) * (cy - ay) - (by - ay) * (cx - ax);
	const d2 = (bx - ax) * (dy - ay) - (by - ay) * (dx - ax);
	if (d1 > 0 === d2 > 0 && d1 !== 0 && d2 !== 0) return false;
	const d3 = (dx - cx) * (ay - cy) - (dy - cy) * (ax - cx);
	const d4 = (dx - cx) * (by - cy) - (dy - cy) * (bx - cx);
	if (d3 > 0 === d4 > 0 && d3 !== 0 && d4 !== 0) return false;
	return !(d1 === 0 && d2 === 0);
}
