/**
 * Voronoi density: each person spreads evenly over the own cell, and a zone's density is what of it falls in the zone.
 *
 * Source: Steffen & Seyfried 2010, *Methods for measuring pedestrian density, flow, speed and direction with minimal
 * scatter*, Physica A 389:1902 (formula from memory): p(x) = 1/A_i in cell i, D = ∫_M p dx / |M|. Cells are clipped to
 * the walkable polygon and, with a cutoff, to an exact disc; |M| is walkable floor only. Where the paper is silent we
 * fixed: the very same position shares one cell with p = m/A, and people outside the floor are dropped and counted.
 */

import { intersect } from '../geometry/clipping.ts';
import { clipHalfPlane, type Flat } from '../geometry/convex.ts';
import { cellAreasWithin, type FloorGrid, type ZoneCells } from '../geometry/grid.ts';
import { createRegion, type Region } from '../geometry/region.ts';
import type { Area, Polygon } from '../geometry/types.ts';
import { createVoronoi, type Cutoff, type VoronoiCells } from './voronoi-cells.ts';

/** Observed cells of a floor's grid, 1 for seen: the live form, much quicker than polygons. */
export interface ObservedCells {
	readonly grid: FloorGrid;
	readonly seen: Uint8Array;
}

/** Where somebody looked; null for everywhere. */
export type Observed = Area | ObservedCells | null;

export interface ZoneVoronoi {
	/** persons/m² over the observed floor of the zone; null when none of it was observed */
	readonly density: number | null;
	/** The same with only the piece of each cell that holds its person: cells do not reach through walls */
	readonly densityOwnPiece: number | null;
	/** Observed walkable floor in the zone, m² */
	readonly measuredArea: number;
	/** Observed share of the zone's walkable floor, 0…1; null when the zone has no floor */
	readonly coverage: number | null;
	/** ∫ p dx over the measured floor: persons, in fractions at the border */
	readonly persons: number;
}

export interface VoronoiInput {
	/** 2n, x then y, m */
	readonly points: Float64Array;
	readonly walkable: Polygon;
	readonly measurement: Polygon;
	readonly cutoff: Cutoff | null;
}

export interface VoronoiDensity extends ZoneVoronoi {
	readonly used: number;
	readonly outsideWalkable: number;
	/** Distinct positions, 2m; the arrays below have one entry for each */
	readonly distinctPoints: Float64Array;
	readonly multiplicity: Uint32Array;
	/** m², all pieces of each cell */
	readonly cellAreas: Float64Array;
	/** m², the piece that holds the person */
	readonly cellAreasOwnPiece: Float64Array;
}

/**
 * Voronoi density of one measurement polygon. Nobody on an observed floor gives 0, no floor gives null.
 *
 * @throws Failure 'bad_input' when the cutoff radius is not positive
 */
export function computeVoronoiDensity({ points, walkable, measurement, cutoff }: VoronoiInput): VoronoiDensity {
	const cells = createVoronoi(points, walkable, cutoff);
	return {
		...measureVoronoi(cells, measurement),
		used: cells.used,
		outsideWalkable: cells.outsideWalkable,
		distinctPoints: cells.points,
		multiplicity: cells.multiplicity,
		cellAreas: cells.areas,
		cellAreasOwnPiece: cells.ownAreas
	};
}

/**
 * Voronoi density of several zones of one floor, sharing the cells; one result per zone in their order. Zones may
 * overlap.
 *
 * @param points 2n, x then y, m: everybody known on the floor, not only those in the zones
 * @throws Failure 'bad_input' when the cutoff radius is not positive
 */
export function computeZoneVoronoi(
	points: Float64Array,
	walkable: Polygon,
	zones: readonly Polygon[],
	cutoff: Cutoff | null,
	observed: Observed = null
): ZoneVoronoi[] {
	const cells = createVoronoi(points, walkable, cutoff);
	return zones.map((zone) => measureVoronoi(cells, zone, observed));
}

/** Measures cells in one zone. */
export function measureVoronoi(cells: VoronoiCells, zone: Polygon, observed: Observed = null): ZoneVoronoi {
	const floor = floorOf(zone, cells.walkable);
	if (observed && 'grid' in observed) {
		const { index, area } = zoneCells(zone, cells.walkable, observed.grid);
		let seenArea = 0;
		for (let k = 0; k < index.length; k++) if (observed.seen[index[k]!] === 1) seenArea += area[k]!;
		return summarise(cells, floor, floor.area, seenArea, (shape, x, y) =>
			withinSeen(floor, observed, shape, x, y, cells.radius)
		);
	}
	const region = observed ? createRegion(intersect(floor.polygons, observed)) : floor;
	return summarise(cells, region, floor.area, region.area, (shape, x, y) =>
		region.areaWithin(shape, x, y, cells.radius)
	);
}

function summarise(
	cells: VoronoiCells,
	{ bounds }: Region,
	floorArea: number,
	measuredArea: number,
	areaOf: (shape: Flat, x: number, y: number) => number
): ZoneVoronoi {
	let persons = 0;
	let personsOwnPiece = 0;
	for (let i = 0; i < cells.shapes.length; i++) {
		const shape = cells.shapes[i]!;
		if (!(cells.areas[i]! > 0) || isApart(shape, bounds)) continue;
		const x = cells.points[2 * i]!;
		const y = cells.points[2 * i + 1]!;
		const share = (cells.multiplicity[i]! * areaOf(shape, x, y)) / cells.areas[i]!;
		persons += share;
		const own = cells.ownShapes[i];
		personsOwnPiece += own
			? own.reduce((sum, piece) => sum + (cells.multiplicity[i]! * areaOf(piece, x, y)) / cells.ownAreas[i]!, 0)
			: share;
	}
	const isMeasured = measuredArea > 0;
	return {
		density: isMeasured ? persons / measuredArea : null,
		densityOwnPiece: isMeasured ? personsOwnPiece / measuredArea : null,
		measuredArea,
		coverage: floorArea > 0 ? Math.min(1, measuredArea / floorArea) : null,
		persons
	};
}

function isApart(shape: Flat, { minX, minY, maxX, maxY }: Region['bounds']): boolean {
	let [left, right, below, above] = [true, true, true, true];
	for (let i = 0; i < shape.length; i += 2) {
		if (shape[i]! > minX) left = false;
		if (shape[i]! < maxX) right = false;
		if (shape[i + 1]! > minY) below = false;
		if (shape[i + 1]! < maxY) above = false;
	}
	return left || right || below || above;
}

/** Area of a convex shape on the seen cells of a floor, run by run of each row; whole when all cells near are seen. */
function withinSeen(
	floor: Region,
	{ grid, seen }: ObservedCells,
	shape: Flat,
	x: number,
	y: number,
	radius: number
): number {
	let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity];
	for (let i = 0; i < shape.length; i += 2) {
		minX = Math.min(minX, shape[i]!);
		maxX = Math.max(maxX, shape[i]!);
		minY = Math.min(minY, shape[i + 1]!);
		maxY = Math.max(maxY, shape[i + 1]!);
	}
	const fromCol = Math.max(0, Math.floor((minX - grid.x0) / grid.cell));
	const toCol = Math.min(grid.cols - 1, Math.floor((maxX - grid.x0) / grid.cell));
	const fromRow = Math.max(0, Math.floor((minY - grid.y0) / grid.cell));
	const toRow = Math.min(grid.rows - 1, Math.floor((maxY - grid.y0) / grid.cell));
	let marks = 0;
	for (let row = fromRow; row <= toRow; row++) {
		for (let col = fromCol; col <= toCol; col++) marks += seen[row * grid.cols + col]!;
	}
	if (marks === 0) return 0;
	if (marks === (toRow - fromRow + 1) * (toCol - fromCol + 1)) return floor.areaWithin(shape, x, y, radius);
	let sum = 0;
	for (let row = fromRow; row <= toRow; row++) {
		const low = grid.y0 + row * grid.cell;
		const band = clipHalfPlane(clipHalfPlane(shape, 0, -1, -low), 0, 1, low + grid.cell);
		for (let col = fromCol; col <= toCol && band.length > 0; col++) {
			if (seen[row * grid.cols + col] !== 1) continue;
			const left = grid.x0 + col * grid.cell;
			while (col < toCol && seen[row * grid.cols + col + 1] === 1) col += 1;
			const right = grid.x0 + (col + 1) * grid.cell;
			sum += floor.areaWithin(clipHalfPlane(clipHalfPlane(band, -1, 0, -left), 1, 0, right), x, y, radius);
		}
	}
	return sum;
}

interface ZoneFloor extends Region {
	readonly polygons: Area;
}

/** Both depend on plans only, which never change once made, and are asked for twice a second. */
const zoneFloors = new WeakMap<Polygon, WeakMap<Polygon, ZoneFloor>>();
const gridCells = new WeakMap<Polygon, WeakMap<FloorGrid, ZoneCells>>();

function floorOf(zone: Polygon, walkable: Polygon): ZoneFloor {
	return remember(zoneFloors, zone, walkable, () => {
		const polygons = intersect([zone], [walkable]);
		return { polygons, ...createRegion(polygons) };
	});
}

const zoneCells = (zone: Polygon, walkable: Polygon, grid: FloorGrid): ZoneCells =>
	remember(gridCells, zone, grid, () => cellAreasWithin(grid, walkable, zone));

function remember<K extends object, T>(
	memory: WeakMap<Polygon, WeakMap<K, T>>,
	zone: Polygon,
	key: K,
	make: () => T
): T {
	let inner = memory.get(zone);
	if (!inner) memory.set(zone, (inner = new WeakMap()));
	let value = inner.get(key);
	if (value === undefined) inner.set(key, (value = make()));
	return value;
}
