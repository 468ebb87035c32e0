/** Intersection, union and difference of areas, on `polygon-clipping` (Martinez, Rueda & Feito 2009). */

import clipper, { type MultiPolygon, type Pair } from 'polygon-clipping';
import { Failure } from '../failure.ts';
import { computePolygonArea } from './polygon.ts';
import type { Area, Polygon, Ring } from './types.ts';

/** m²; pieces below this are rounding, not floor. */
const SLIVER = 1e-12;

/** m; the grids corners are moved to, one after the other, when the clipper cannot join nearly coincident edges. */
const SNAPS = [0, 1e-9, 1e-7, 1e-5] as const;

/**
 * Where `a` and `b` overlap. Empty input, or input without area, gives [].
 *
 * @throws Failure 'bad_input' when a corner is not finite
 */
export const intersect = (a: Area, b: Area): Area =>
	attempt([a, b], ([first, second]) => (first!.length && second!.length ? clipper.intersection(first!, second!) : []));

/**
 * What any of the areas covers, counted once. Overlapping input is fine; empty input gives [].
 *
 * @throws Failure 'bad_input' when a corner is not finite
 */
export const unite = (areas: readonly Area[]): Area =>
	attempt(areas, (all) => {
		const [first, ...others] = all.filter((area) => area.length > 0);
		return first ? clipper.union(first, ...others) : [];
	});

/**
 * `a` without `b`.
 *
 * @throws Failure 'bad_input' when a corner is not finite
 */
export const subtract = (a: Area, b: Area): Area =>
	attempt([a, b], ([first, second]) => (first!.length ? clipper.difference(first!, second!) : []));

function attempt(areas: readonly Area[], run: (geometries: MultiPolygon[]) => MultiPolygon): Area {
	for (const snap of SNAPS) {
		try {
			return polygonsFrom(run(areas.map((area) => geometryFrom(area, snap))));
		} catch (cause) {
			if (cause instanceof Failure || snap === SNAPS[SNAPS.length - 1]) throw cause;
		}
	}
	return [];
}

function geometryFrom(area: Area, snap: number): MultiPolygon {
	return area
		.filter((polygon) => computePolygonArea(polygon) !== 0)
		.map(({ outer, holes }) => [outer, ...holes].map((ring) => closedRing(ring, snap)));
}

function closedRing(ring: Ring, snap: number): Pair[] {
	const corners = ring.map(([x, y]): Pair => {
		if (!Number.isFinite(x) || !Number.isFinite(y)) throw new Failure('bad_input', 'A corner is not a number.');
		return snap === 0 ? [x, y] : [Math.round(x / snap) * snap, Math.round(y / snap) * snap];
	});
	return corners[0] ? [...corners, corners[0]] : [];
}

function polygonsFrom(geometry: MultiPolygon): Area {
	return geometry
		.map(([outer, ...holes]): Polygon => ({ outer: openRing(outer), holes: holes.map(openRing) }))
		.filter((polygon) => computePolygonArea(polygon) > SLIVER);
}

/** The clipper repeats the first corner at the end; our rings do not. */
const openRing = (ring: Pair[] = []): Ring => ring.slice(0, -1);
