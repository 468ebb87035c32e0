/**
 * The one place where metres of a floor become longitude and latitude, and pixels.
 *
 * The floor frame is laid on the sphere at (0, 0) through the inverse of the web map's own Mercator projection, so that
 * the drawing is exactly to scale: a metre is the same number of pixels everywhere on the plan.
 */

import type { Bounds, Point, Ring } from '../../domain/geometry/types.ts';

/** Radius of the sphere of the web Mercator projection, m (EPSG:3857). */
const RADIUS_M = 6_378_137;
const DEGREES = 180 / Math.PI;
/** Pixels of the whole world at zoom 0 in the map library. */
const WORLD_PX = 512;

/** Longitude and latitude, degrees, of a point of the floor. */
export const toLngLat = (x: number, y: number): [lng: number, lat: number] => [
	(x / RADIUS_M) * DEGREES,
	Math.atan(Math.sinh(y / RADIUS_M)) * DEGREES
];

/** The point of the floor, m, at a longitude and latitude. */
export const fromLngLat = (lng: number, lat: number): Point => ({
	x: (lng / DEGREES) * RADIUS_M,
	y: Math.asinh(Math.tan(lat / DEGREES)) * RADIUS_M
});

/** Pixels per metre at a zoom of the map, and back. */
export const pxPerMetre = (zoom: number): number => (WORLD_PX * 2 ** zoom) / (2 * Math.PI * RADIUS_M);
export const zoomAt = (pxPerM: number): number => Math.log2((pxPerM * 2 * Math.PI * RADIUS_M) / WORLD_PX);

/** Closed ring of a GeoJSON polygon. */
export function lngLatRing(ring: Ring): [number, number][] {
	const closed = ring.map(([x, y]) => toLngLat(x, y));
	if (closed[0]) closed.push(closed[0]);
	return closed;
}

/** What a viewport of `width` × `height` px shows: the floor point in its middle and the scale. */
export interface View {
	readonly centre: Point;
	readonly pxPerM: number;
	readonly width: number;
	readonly height: number;
}

export const screenX = (view: View, x: number): number => view.width / 2 + (x - view.centre.x) * view.pxPerM;
export const screenY = (view: View, y: number): number => view.height / 2 - (y - view.centre.y) * view.pxPerM;

/** The point of the floor under a pixel. */
export const floorAt = (view: View, px: number, py: number): Point => ({
	x: view.centre.x + (px - view.width / 2) / view.pxPerM,
	y: view.centre.y - (py - view.height / 2) / view.pxPerM
});

/** Smallest box around a ring; an empty ring has an empty box at the origin. */
export function boundsOf(ring: Ring): Bounds {
	if (ring.length === 0) return { minX: 0, minY: 0, maxX: 0, maxY: 0 };
	const xs = ring.map(([x]) => x);
	const ys = ring.map(([, y]) => y);
	return { minX: Math.min(...xs), minY: Math.min(...ys), maxX: Math.max(...xs), maxY: Math.max(...ys) };
}
