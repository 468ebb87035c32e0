/** A floor as square cells with their exact walkable areas. */

import { Failure } from '../failure.ts';
import { intersect } from './clipping.ts';
import { flatArea, rectangle, type Flat } from './convex.ts';
import { boundsOf, computeArea, isInside } from './polygon.ts';
import { createRegion, regionOf, type Region } from './region.ts';
import type { Point, Polygon } from './types.ts';

/** Where the cells of a grid are: row by row from the lower left, index = row · cols + column. */
export interface GridFrame {
	/** Lower left corner, m */
	readonly x0: number;
	readonly y0: number;
	/** Side of a cell, m */
	readonly cell: number;
	readonly cols: number;
	readonly rows: number;
}

export interface FloorGrid extends GridFrame {
	/** Walkable m² of each cell; exactly cell² where all of it is floor, exactly 0 where none is. */
	readonly area: Float64Array;
	/** A walkable point of each cell, its middle where all of it is floor; NaN where none is. */
	readonly sampleX: Float64Array;
	readonly sampleY: Float64Array;
}

/** Cells that share floor with a zone. */
export interface ZoneCells {
	readonly index: Int32Array;
	/** Area of cell ∩ zone ∩ walkable, m², one per entry of `index` */
	readonly area: Float64Array;
	/** Area of zone ∩ walkable, m² */
	readonly total: number;
}

/** Share of a cell; less walkable area than this is rounding. */
const SLIVER = 1e-9;

/**
 * Grid over the bounds of a walkable polygon, its lower left corner being theirs.
 *
 * @param cell side, m; 0.5 by default. A smaller cell is finer and costs with its square.
 * @throws Failure 'bad_input' when the polygon has no area or the cell is not positive
 */
export function createFloorGrid(walkable: Polygon, cell = 0.5): FloorGrid {
	if (!(cell > 0)) throw new Failure('bad_input', 'The side of a grid cell must be positive.');
	const region = regionOf(walkable);
	if (!(region.area > 0)) throw new Failure('bad_input', 'The walkable polygon has no area.');
	const { minX, minY, maxX, maxY } = region.bounds;
	// A floor of 12 m in cells of 0.1 m has 120 columns, whatever 12/0.1 comes to.
	const count = (length: number) => Math.max(1, Math.ceil(length / cell - SLIVER));
	const frame = { x0: minX, y0: minY, cell, cols: count(maxX - minX), rows: count(maxY - minY) };
	const size = frame.cols * frame.rows;
	const area = new Float64Array(size);
	const sampleX = new Float64Array(size).fill(NaN);
	const sampleY = new Float64Array(size).fill(NaN);
	for (let index = 0; index < size; index++) {
		area[index] = areaOfCell(region, frame, index);
		if (area[index] === 0) continue;
		const sample = area[index] === cell * cell ? middleOf(frame, index) : sampleOf(walkable, region, frame, index);
		sampleX[index] = sample.x;
		sampleY[index] = sample.y;
	}
	return { ...frame, area, sampleX, sampleY };
}

/** Index of the cell that holds (x, y); −1 outside and for NaN. Cells are half-open, the far rim closed, so nobody counts twice. */
export function cellIndex({ x0, y0, cell, cols, rows }: GridFrame, x: number, y: number): number {
	const col = Math.floor((x - x0) / cell);
	const row = Math.floor((y - y0) / cell);
	const rimCol = col === cols && x === x0 + cols * cell ? cols - 1 : col;
	const rimRow = row === rows && y === y0 + rows * cell ? rows - 1 : row;
	if (!(rimCol >= 0 && rimCol < cols && rimRow >= 0 && rimRow < rows)) return -1;
	return rimRow * cols + rimCol;
}

/** Cells of the grid with floor in the zone, and how much; a zone off the floor has none and a total of 0. */
export function cellAreasWithin(grid: GridFrame, walkable: Polygon, zone: Polygon): ZoneCells {
	const floor = intersect([zone], [walkable]);
	const region = createRegion(floor);
	const index: number[] = [];
	const area: number[] = [];
	const { minX, minY, maxX, maxY } = boundsOf(zone);
	const fromCol = Math.max(0, Math.floor((minX - grid.x0) / grid.cell));
	const toCol = Math.min(grid.cols - 1, Math.floor((maxX - grid.x0) / grid.cell));
	const fromRow = Math.max(0, Math.floor((minY - grid.y0) / grid.cell));
	const toRow = Math.min(grid.rows - 1, Math.floor((maxY - grid.y0) / grid.cell));
	for (let row = fromRow; row <= toRow; row++) {
		for (let col = fromCol; col <= toCol; col++) {
			const inside = areaOfCell(region, grid, row * grid.cols + col);
			if (inside === 0) continue;
			index.push(row * grid.cols + col);
			area.push(inside);
		}
	}
	return { index: Int32Array.from(index), area: Float64Array.from(area), total: computeArea(floor) };
}

function cornersOf({ x0, y0, cell, cols }: GridFrame, index: number): Flat {
	const col = index % cols;
	const row = (index - col) / cols;
	return rectangle(x0 + col * cell, y0 + row * cell, x0 + (col + 1) * cell, y0 + (row + 1) * cell);
}

function middleOf({ x0, y0, cell, cols }: GridFrame, index: number): Point {
	const col = index % cols;
	const row = (index - col) / cols;
	return { x: x0 + (col + 0.5) * cell, y: y0 + (row + 0.5) * cell };
}

/** Snapped to 0 and to cell², so that whole cells add up without rounding of their own. */
function areaOfCell(region: Region, frame: GridFrame, index: number): number {
	const whole = frame.cell * frame.cell;
	const inside = region.areaWithin(cornersOf(frame, index), 0, 0, Infinity);
	if (inside <= SLIVER * whole) return 0;
	return inside >= (1 - SLIVER) * whole ? whole : inside;
}

/** The centre of mass of the cell's floor where that is floor, else the middle of its widest stretch. */
function sampleOf(walkable: Polygon, region: Region, frame: GridFrame, index: number): Point {
	const rings = region.ringsWithin(cornersOf(frame, index));
	const centre = centreOf(rings);
	return isInside(walkable, centre.x, centre.y) ? centre : widestStretch(rings, centre);
}

function centreOf(rings: readonly Flat[]): Point {
	let [mass, mx, my] = [0, 0, 0];
	const ox = rings[0]?.[0] ?? NaN;
	const oy = rings[0]?.[1] ?? NaN;
	for (const ring of rings) {
		for (let i = 0; i < ring.length; i += 2) {
			const j = (i + 2) % ring.length;
			const [ax, ay, bx, by] = [ring[i]! - ox, ring[i + 1]! - oy, ring[j]! - ox, ring[j + 1]! - oy];
			const cross = ax * by - ay * bx;
			mass += cross;
			mx += cross * (ax + bx);
			my += cross * (ay + by);
		}
	}
	return mass === 0 ? { x: ox, y: oy } : { x: ox + mx / (3 * mass), y: oy + my / (3 * mass) };
}

/** Odd, so that the levels avoid the middle, where corners of symmetric floors tend to lie. */
const LEVELS = 7;

function widestStretch(rings: readonly Flat[], fallback: Point): Point {
	const heights = rings.filter((ring) => flatArea(ring) !== 0).flatMap((ring) => ring.filter((_, i) => i % 2 === 1));
	const [low, high] = [Math.min(...heights), Math.max(...heights)];
	let best = fallback;
	let widest = 0;
	for (let k = 0; k < LEVELS; k++) {
		const y = low + ((high - low) * (k + 0.41)) / LEVELS;
		const crossings = rings.flatMap((ring) => crossingsAt(ring, y)).sort((a, b) => a - b);
		for (let i = 0; i + 1 < crossings.length; i += 2) {
			const width = crossings[i + 1]! - crossings[i]!;
			if (width <= widest) continue;
			widest = width;
			best = { x: crossings[i]! + width / 2, y };
		}
	}
	return best;
}

function crossingsAt(ring: Flat, y: number): number[] {
	const found: number[] = [];
	for (let i = 0; i < ring.length; i += 2) {
		const j = (i + 2) % ring.length;
		const [ax, ay, bx, by] = [ring[i]!, ring[i + 1]!, ring[j]!, ring[j + 1]!];
		if (ay > y !== by > y) found.push(ax + ((bx - ax) * (y - ay)) / (by - ay));
	}
	return found;
}
