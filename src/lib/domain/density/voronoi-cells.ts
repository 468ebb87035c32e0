/** Everybody's Voronoi cell on a floor: nearer to this person than to anyone else, walkable, and within the cutoff. */

import { Delaunay } from 'd3-delaunay';
import { Failure } from '../failure.ts';
import { intersect } from '../geometry/clipping.ts';
import {
	clipHalfPlane,
	clipToConvex,
	convexPieces,
	flatArea,
	flatAreaInDisc,
	flatFrom,
	rectangle,
	type Flat
} from '../geometry/convex.ts';
import { distanceToSegment, edgesOf, isInside } from '../geometry/polygon.ts';
import { regionOf } from '../geometry/region.ts';
import type { Bounds, Point, Polygon, Ring } from '../geometry/types.ts';
import { createWallIndex, type WallIndex } from '../geometry/walls.ts';

/** Disc round each person that bounds rim cells; the discs are exact circles. */
export interface Cutoff {
	/** m, positive; the source suggests about 1–2 (from memory) */
	readonly radius: number;
}

/** Cells of one moment, to be measured in as many zones as wanted. Persons at the very same spot share one. */
export interface VoronoiCells {
	readonly walkable: Polygon;
	/** Distinct positions, 2m, x then y */
	readonly points: Float64Array;
	/** Persons at each distinct position */
	readonly multiplicity: Uint32Array;
	/** Walkable area of each cell with all its pieces, m² */
	readonly areas: Float64Array;
	/** Walkable area of the piece that holds the person, m² */
	readonly ownAreas: Float64Array;
	/** Distinct position of each input point, −1 for one outside the walkable polygon */
	readonly cellOf: Int32Array;
	readonly used: number;
	readonly outsideWalkable: number;
	/** m; Infinity without a cutoff */
	readonly radius: number;
	/** Convex cell of each position before floor and disc are applied */
	readonly shapes: readonly Flat[];
	/** Convex pieces that make up the own piece where the floor cuts a cell in two, else null */
	readonly ownShapes: readonly (readonly Flat[] | null)[];
}

/** Up to here comparing everybody with everybody is as quick as a triangulation, and knows no degenerate case. */
const SMALL = 24;

/**
 * @param points 2n, x then y, m; kept as they are. Positions that are not finite count as outside the walkable polygon.
 * @throws Failure 'bad_input' when the cutoff radius is not positive
 */
export function createVoronoi(points: Float64Array, walkable: Polygon, cutoff: Cutoff | null): VoronoiCells {
	const radius = cutoff ? cutoff.radius : Infinity;
	if (!(radius > 0)) throw new Failure('bad_input', 'The cutoff radius must be positive.');
	const { distinct, multiplicity, cellOf, used } = mergePoints(points, walkable);
	const region = regionOf(walkable);
	const shapes = convexCells(distinct, region.bounds, radius);
	const areas = new Float64Array(shapes.length);
	const ownAreas = new Float64Array(shapes.length);
	const ownShapes = shapes.map((shape, i) => {
		const x = distinct[2 * i]!;
		const y = distinct[2 * i + 1]!;
		const uncut = flatAreaInDisc(shape, x, y, radius);
		areas[i] = ownAreas[i] = region.areaWithin(shape, x, y, radius);
		if (areas[i]! >= uncut * (1 - 1e-9)) return null;
		const own = ownPieces(shape, { x, y }, radius, walkable);
		if (own) ownAreas[i] = own.reduce((sum, piece) => sum + flatAreaInDisc(piece, x, y, radius), 0);
		return own;
	});
	return {
		walkable,
		points: distinct,
		multiplicity,
		areas,
		ownAreas,
		cellOf,
		used,
		outsideWalkable: cellOf.length - used,
		radius,
		shapes,
		ownShapes
	};
}

function mergePoints(points: Float64Array, walkable: Polygon) {
	const cellOf = new Int32Array(points.length >> 1).fill(-1);
	const distinct: number[] = [];
	const counts: number[] = [];
	const byX = new Map<number, Map<number, number>>();
	const region = regionOf(walkable);
	let used = 0;
	for (let i = 0; i < cellOf.length; i++) {
		const x = points[2 * i]!;
		const y = points[2 * i + 1]!;
		if (!Number.isFinite(x) || !Number.isFinite(y) || !region.contains(x, y)) continue;
		used += 1;
		let column = byX.get(x);
		if (!column) byX.set(x, (column = new Map()));
		let cell = column.get(y);
		if (cell === undefined) {
			cell = counts.length;
			column.set(y, cell);
			distinct.push(x, y);
			counts.push(0);
		}
		counts[cell]! += 1;
		cellOf[i] = cell;
	}
	return { distinct: Float64Array.from(distinct), multiplicity: Uint32Array.from(counts), cellOf, used };
}

/** Cells in the box of the floor and, with a cutoff, in the square round the disc. */
function convexCells(points: Float64Array, { minX, minY, maxX, maxY }: Bounds, radius: number): Flat[] {
	const size = points.length >> 1;
	const cells: Flat[] = [];
	for (let i = 0; i < size; i++) {
		const x = points[2 * i]!;
		const y = points[2 * i + 1]!;
		cells.push(
			rectangle(
				Math.max(minX, x - radius),
				Math.max(minY, y - radius),
				Math.min(maxX, x + radius),
				Math.min(maxY, y + radius)
			)
		);
	}
	const reach = 4 * radius * radius;
	const separate = (i: number, j: number) => {
		const px = points[2 * i]!;
		const py = points[2 * i + 1]!;
		const qx = points[2 * j]!;
		const qy = points[2 * j + 1]!;
		const nx = qx - px;
		const ny = qy - py;
		if (nx * nx + ny * ny >= reach) return;
		cells[i] = clipHalfPlane(cells[i]!, nx, ny, (nx * (px + qx) + ny * (py + qy)) / 2);
	};
	const triangulation = size > SMALL ? triangulate(points) : null;
	if (triangulation) {
		const { triangles, halfedges } = triangulation;
		for (let edge = 0; edge < triangles.length; edge++) {
			const i = triangles[edge]!;
			const j = triangles[edge % 3 === 2 ? edge - 2 : edge + 1]!;
			separate(i, j);
			// An inner edge comes by again the other way; one on the hull does not.
			if (halfedges[edge] === -1) separate(j, i);
		}
		return cells;
	}
	for (let i = 0; i < size; i++) {
		for (let j = 0; j < size; j++) if (i !== j) separate(i, j);
	}
	return cells;
}

/** Null when positions are (nearly) in line or coincide within rounding, which a triangulation cannot tell apart. */
function triangulate(points: Float64Array): Delaunay<unknown> | null {
	// A copy: collinear points are moved about in the array handed over.
	const copy = points.slice();
	const delaunay = new Delaunay(copy);
	if (copy.some((value, i) => value !== points[i])) return null;
	return delaunay.inedges.includes(-1) ? null : delaunay;
}

const floorEdges = new WeakMap<Polygon, WallIndex>();

/** m; the floor's border touching that of a cell this closely may cut it in two. */
const TOUCH = 1e-9;

/** Convex pieces of the part that holds the person, or null when the cell is in one part. */
function ownPieces(shape: Flat, person: Point, radius: number, walkable: Polygon): Flat[] | null {
	if (!mayBeCut(shape, person, radius, walkable)) return null;
	const convex = insideDisc(shape, person, radius);
	const parts = intersect([{ outer: ringFrom(convex), holes: [] }], localFloor(walkable, convex));
	if (parts.length < 2) return null;
	const own = parts.reduce((best, part) => (distanceTo(part, person) < distanceTo(best, person) ? part : best));
	return convexPieces([own.outer, ...own.holes].map(flatFrom));
}

/** A convex cell stays whole when the floor's border runs through it once or only lies inside. */
function mayBeCut(shape: Flat, person: Point, radius: number, walkable: Polygon): boolean {
	let edges = floorEdges.get(walkable);
	if (!edges) floorEdges.set(walkable, (edges = createWallIndex(edgesOf(walkable))));
	let reach = 0;
	for (let i = 0; i < shape.length; i += 2) {
		reach = Math.max(reach, Math.hypot(shape[i]! - person.x, shape[i + 1]! - person.y));
	}
	let crossings = 0;
	for (const { ax, ay, bx, by } of edges.near(person.x, person.y, Math.min(reach, radius) + TOUCH)) {
		const startDepth = depthIn(shape, person, radius, ax, ay);
		const endDepth = depthIn(shape, person, radius, bx, by);
		if (Math.abs(startDepth) <= TOUCH || Math.abs(endDepth) <= TOUCH) return true;
		if (startDepth > 0 !== endDepth > 0) crossings += 1;
		else if (startDepth < 0 && passes(shape, person, radius, ax, ay, bx, by)) crossings += 2;
		if (crossings > 2) return true;
	}
	return false;
}

/** How far inside the cell and disc a point is, m; negative outside. */
function depthIn(shape: Flat, person: Point, radius: number, x: number, y: number): number {
	let depth = radius - Math.hypot(x - person.x, y - person.y);
	let ax = shape[shape.length - 2]!;
	let ay = shape[shape.length - 1]!;
	for (let i = 0; i < shape.length; i += 2) {
		const bx = shape[i]!;
		const by = shape[i + 1]!;
		const length = Math.hypot(bx - ax, by - ay);
		if (length > 0) depth = Math.min(depth, ((bx - ax) * (y - ay) - (by - ay) * (x - ax)) / length);
		ax = bx;
		ay = by;
	}
	return depth;
}

/** Whether a segment with both ends outside runs through the cell within the disc; a touch counts. */
function passes(shape: Flat, person: Point, radius: number, ax: number, ay: number, bx: number, by: number): boolean {
	const inside = clipToConvex([ax, ay, bx, by, bx, by], shape);
	if (inside.length === 0) return false;
	let least = Infinity;
	for (let i = 0; i < inside.length; i += 2) {
		const j = (i + 2) % inside.length;
		const piece = { ax: inside[i]!, ay: inside[i + 1]!, bx: inside[j]!, by: inside[j + 1]! };
		least = Math.min(least, distanceToSegment(person.x, person.y, piece));
	}
	return least <= radius + TOUCH;
}

/** Corners of the polygon drawn round the disc to see what hangs together; areas use the exact disc. */
const DISC_CORNERS = 64;

function insideDisc(shape: Flat, { x, y }: Point, radius: number): Flat {
	if (radius === Infinity) return shape;
	let convex = shape;
	for (let k = 0; k < DISC_CORNERS; k++) {
		const nx = Math.cos((2 * Math.PI * k) / DISC_CORNERS);
		const ny = Math.sin((2 * Math.PI * k) / DISC_CORNERS);
		convex = clipHalfPlane(convex, nx, ny, nx * x + ny * y + radius);
	}
	return convex;
}

/** m; the floor is cut a little outside the cell, so that the edges along that cut do not matter. */
const AROUND = 0.5;

/** The floor near a cell: clipping against all of a large floor would cost far more. */
function localFloor(walkable: Polygon, convex: Flat): Polygon[] {
	const xs = convex.filter((_, i) => i % 2 === 0);
	const ys = convex.filter((_, i) => i % 2 === 1);
	const frame = rectangle(
		Math.min(...xs) - AROUND,
		Math.min(...ys) - AROUND,
		Math.max(...xs) + AROUND,
		Math.max(...ys) + AROUND
	);
	const clip = (ring: Ring): Ring => ringFrom(clipToConvex(flatFrom(ring), frame));
	const outer = clip(walkable.outer);
	return [{ outer, holes: walkable.holes.map(clip).filter((hole) => Math.abs(flatArea(flatFrom(hole))) > 0) }];
}

function distanceTo(polygon: Polygon, { x, y }: Point): number {
	if (isInside(polygon, x, y)) return 0;
	return edgesOf(polygon).reduce((least, edge) => Math.min(least, distanceToSegment(x, y, edge)), Infinity);
}

const ringFrom = (flat: Flat): Ring =>
	Array.from({ length: flat.length / 2 }, (_, i) => [flat[2 * i]!, flat[2 * i + 1]!] as const);
