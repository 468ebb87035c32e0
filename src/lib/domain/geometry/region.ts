/** An area indexed so that the part of it inside a small convex polygon is measured without clipping all of it. */

import { clipHalfPlane, clipToConvex, flatArea, flatAreaInDisc, flatFrom, rectangle, type Flat } from './convex.ts';
import { computeSignedArea, isInside, ON_EDGE } from './polygon.ts';
import type { Area, Bounds, Polygon } from './types.ts';

export interface Region {
	readonly bounds: Bounds;
	/** m² */
	readonly area: number;
	/**
	 * Area of region ∩ convex polygon ∩ disc, m², exact up to rounding.
	 * The polygon is counter-clockwise; radius Infinity leaves out the disc.
	 */
	areaWithin(convex: Flat, x: number, y: number, radius: number): number;
	/** Whether (x, y) is in the region, borders included. NaN is outside. */
	contains(x: number, y: number): boolean;
	/** Rings of region ∩ convex polygon, holes clockwise; concave ones may run back along the cut. */
	ringsWithin(convex: Flat): Flat[];
}

/** A node is empty (no rings), full, split in two, or a leaf holding its own clipped rings. */
interface Node {
	readonly rings: readonly Flat[];
	readonly full: boolean;
	readonly split: { readonly axis: 0 | 1; readonly at: number; readonly low: Node; readonly high: Node } | null;
}

/** Chosen by us: below eight corners clipping the rings costs less than another split. */
const LEAF_CORNERS = 8;
const MAX_DEPTH = 16;

const EMPTY: Node = { rings: [], full: false, split: null };
const FULL: Node = { rings: [], full: true, split: null };

/** Index over disjoint polygons. Cost n log n in the number of corners; an empty area measures 0 everywhere. */
export function createRegion(area: Area): Region {
	const rings = area.flatMap(orientedRings);
	const bounds = boundsOfRings(rings);
	const root = build(rings, bounds, 0);
	const frame = rectangle(bounds.minX, bounds.minY, bounds.maxX, bounds.maxY);
	const total = rings.reduce((sum, ring) => sum + flatArea(ring), 0);
	/** Nodes take it that what they are asked about lies within their own bounds. */
	const inFrame = (convex: Flat) => (isWithin(convex, bounds) ? convex : clipToConvex(convex, frame));
	return {
		bounds,
		area: total,
		areaWithin(convex, x, y, radius) {
			return rings.length === 0 ? 0 : measure(root, inFrame(convex), x, y, radius);
		},
		contains(x, y) {
			const { minX, minY, maxX, maxY } = bounds;
			if (!(x >= minX - ON_EDGE && x <= maxX + ON_EDGE && y >= minY - ON_EDGE && y <= maxY + ON_EDGE)) return false;
			const place = placeOf(root, x, y);
			return place === 'border' ? area.some((polygon) => isInside(polygon, x, y)) : place === 'inside';
		},
		ringsWithin(convex) {
			const found: Flat[] = [];
			if (rings.length > 0) collect(root, inFrame(convex), found);
			return found;
		}
	};
}

const regions = new WeakMap<Polygon, Region>();

/** The region of one polygon, built at the first call and kept as long as the polygon (which is never changed) lives. */
export function regionOf(polygon: Polygon): Region {
	let region = regions.get(polygon);
	if (!region) regions.set(polygon, (region = createRegion([polygon])));
	return region;
}

function orientedRings({ outer, holes }: Polygon): Flat[] {
	return [outer, ...holes].flatMap((ring) => {
		const area = computeSignedArea(ring);
		if (area === 0) return [];
		return [flatFrom(area > 0 === (ring === outer) ? ring : [...ring].reverse())];
	});
}

function build(rings: readonly Flat[], bounds: Bounds, depth: number): Node {
	const { minX, minY, maxX, maxY } = bounds;
	const room = (maxX - minX) * (maxY - minY);
	let covered = 0;
	let corners = 0;
	for (const ring of rings) {
		covered += flatArea(ring);
		corners += ring.length / 2;
	}
	if (!(room > 0) || covered <= 1e-12 * Math.min(1, room)) return EMPTY;
	if (covered >= room * (1 - 1e-12)) return FULL;
	if (corners <= LEAF_CORNERS || depth === MAX_DEPTH) return { rings, full: false, split: null };
	const axis = maxX - minX >= maxY - minY ? 0 : 1;
	const at = axis === 0 ? (minX + maxX) / 2 : (minY + maxY) / 2;
	const half = (sign: 1 | -1) => rings.map((ring) => clipAxis(ring, axis, at, sign)).filter((ring) => ring.length > 0);
	const low = build(half(1), axis === 0 ? { ...bounds, maxX: at } : { ...bounds, maxY: at }, depth + 1);
	const high = build(half(-1), axis === 0 ? { ...bounds, minX: at } : { ...bounds, minY: at }, depth + 1);
	return { rings: [], full: false, split: { axis, at, low, high } };
}

/** Sign 1 keeps what is below `at`, −1 what is above. */
const clipAxis = (polygon: Flat, axis: 0 | 1, at: number, sign: 1 | -1): Flat =>
	clipHalfPlane(polygon, axis === 0 ? sign : 0, axis === 1 ? sign : 0, sign * at);

function measure({ full, split, rings }: Node, convex: Flat, x: number, y: number, radius: number): number {
	if (convex.length < 6) return 0;
	if (full) return flatAreaInDisc(convex, x, y, radius);
	if (split) {
		const { axis, at, low, high } = split;
		const below = clipAxis(convex, axis, at, 1);
		if (below === convex) return measure(low, convex, x, y, radius);
		return measure(low, below, x, y, radius) + measure(high, clipAxis(convex, axis, at, -1), x, y, radius);
	}
	let sum = 0;
	for (const ring of rings) sum += flatAreaInDisc(clipToConvex(ring, convex), x, y, radius);
	return sum;
}

/** 'border' where only the whole polygons can tell; both halves are asked about a point on their common line. */
function placeOf({ full, split, rings }: Node, x: number, y: number): 'inside' | 'outside' | 'border' {
	if (full) return 'inside';
	if (!split) return placeInRings(rings, x, y);
	const value = split.axis === 0 ? x : y;
	if (value < split.at - ON_EDGE) return placeOf(split.low, x, y);
	if (value > split.at + ON_EDGE) return placeOf(split.high, x, y);
	const low = placeOf(split.low, x, y);
	return low === 'inside' ? low : low === placeOf(split.high, x, y) ? low : 'border';
}

/** Even–odd rule; edges back along a cut come in pairs and cancel, but a point on any edge needs the whole polygons. */
function placeInRings(rings: readonly Flat[], x: number, y: number): 'inside' | 'outside' | 'border' {
	let inside = false;
	for (const ring of rings) {
		let ax = ring[ring.length - 2]!;
		let ay = ring[ring.length - 1]!;
		for (let i = 0; i < ring.length; i += 2) {
			const bx = ring[i]!;
			const by = ring[i + 1]!;
			// Signed distance from the edge's line, times its length.
			const side = (bx - ax) * (y - ay) - (by - ay) * (x - ax);
			if (Math.abs(side) <= ON_EDGE * (Math.abs(bx - ax) + Math.abs(by - ay))) return 'border';
			if (ay > y !== by > y && side > 0 === by > ay) inside = !inside;
			ax = bx;
			ay = by;
		}
	}
	return inside ? 'inside' : 'outside';
}

function collect({ full, split, rings }: Node, convex: Flat, found: Flat[]): void {
	if (convex.length < 6) return;
	if (full) found.push(convex);
	if (split) {
		collect(split.low, clipAxis(convex, split.axis, split.at, 1), found);
		collect(split.high, clipAxis(convex, split.axis, split.at, -1), found);
	}
	for (const ring of rings) {
		const inside = clipToConvex(ring, convex);
		if (inside.length > 0) found.push(inside);
	}
}

function isWithin(polygon: Flat, { minX, minY, maxX, maxY }: Bounds): boolean {
	for (let i = 0; i < polygon.length; i += 2) {
		const x = polygon[i]!;
		const y = polygon[i + 1]!;
		if (x < minX || x > maxX || y < minY || y > maxY) return false;
	}
	return true;
}

function boundsOfRings(rings: readonly Flat[]): Bounds {
	let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity];
	for (const ring of rings) {
		for (let i = 0; i < ring.length; i += 2) {
			minX = Math.min(minX, ring[i]!);
			maxX = Math.max(maxX, ring[i]!);
			minY = Math.min(minY, ring[i + 1]!);
			maxY = Math.max(maxY, ring[i + 1]!);
		}
	}
	return { minX, minY, maxX, maxY };
}
