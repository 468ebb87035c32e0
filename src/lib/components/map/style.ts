/** The drawing under everything that moves: paper, floor, hatching, density, walls. Built in code, nothing is downloaded. */

import type { Feature, FeatureCollection } from 'geojson';
import type { ExpressionSpecification, StyleSpecification } from 'maplibre-gl';
import type { Polygon } from '../../domain/geometry/types.ts';
import type { Ink } from './ink.ts';
import type { Plan } from './plan.ts';
import { boundsOf, lngLatRing, pxPerMetre, toLngLat } from './projection.ts';

export const HATCH = 'unobserved';
export const HEAT = 'heat';

/** Corners of an image over a box of the floor, in the order the map wants them: from top left, clockwise. */
export function imageCorners(x0: number, y0: number, x1: number, y1: number) {
	return [toLngLat(x0, y1), toLngLat(x1, y1), toLngLat(x1, y0), toLngLat(x0, y0)] as [
		[number, number],
		[number, number],
		[number, number],
		[number, number]
	];
}

export function buildStyle(plan: Plan, ink: Ink): StyleSpecification {
	const box = boundsOf(plan.walkable.outer);
	const geojson = (...features: Feature[]) => ({
		type: 'geojson' as const,
		data: { type: 'FeatureCollection', features } satisfies FeatureCollection,
		tolerance: 0
	});
	return {
		version: 8,
		sources: {
			floor: geojson(feature({ type: 'Polygon', coordinates: rings(plan.walkable) })),
			around: geojson(
				feature({ type: 'Polygon', coordinates: [lngLatRing(farAround(box)), lngLatRing(plan.walkable.outer)] })
			),
			fixtures: geojson(
				...plan.walkable.holes.map((hole) => feature({ type: 'Polygon', coordinates: [lngLatRing(hole)] }))
			),
			walls: geojson(
				feature({
					type: 'MultiLineString',
					coordinates: plan.walls.map(({ ax, ay, bx, by }) => [toLngLat(ax, ay), toLngLat(bx, by)])
				})
			),
			zones: geojson(...plan.zones.map(({ polygon }) => feature({ type: 'Polygon', coordinates: rings(polygon) }))),
			[HEAT]: { type: 'image', coordinates: imageCorners(box.minX, box.minY, box.maxX, box.maxY) } as never
		},
		layers: [
			{ id: 'paper', type: 'background', paint: { 'background-color': ink.paper } },
			{ id: 'floor', type: 'fill', source: 'floor', paint: { 'fill-color': ink.floor } },
			{ id: 'unobserved', type: 'fill', source: 'floor', paint: { 'fill-pattern': HATCH } },
			{
				id: 'heat',
				type: 'raster',
				source: HEAT,
				paint: { 'raster-fade-duration': 0, 'raster-resampling': 'linear' }
			},
			{ id: 'around', type: 'fill', source: 'around', paint: { 'fill-color': ink.paper, 'fill-antialias': false } },
			{
				id: 'zones',
				type: 'line',
				source: 'zones',
				paint: { 'line-color': ink.rule, 'line-dasharray': [6, 3], 'line-width': 0.75 }
			},
			{ id: 'fixtures', type: 'fill', source: 'fixtures', paint: { 'fill-color': ink.hairline } },
			{ id: 'fixture-edges', type: 'line', source: 'fixtures', paint: { 'line-color': ink.ink, 'line-width': 1 } },
			{
				id: 'walls',
				type: 'line',
				source: 'walls',
				layout: { 'line-cap': 'square' },
				paint: { 'line-color': ink.ink, 'line-width': metreWidth(0.2, 1.5) }
			},
			{
				id: 'outer-wall',
				type: 'line',
				source: 'floor',
				layout: { 'line-join': 'miter' },
				paint: { 'line-color': ink.ink, 'line-width': metreWidth(0.35, 2) }
			}
		]
	};
}

/** Diagonal hatching for floor that nobody has seen, as an image that tiles without a seam. */
export function drawHatch(ink: Ink, scale: number): ImageData {
	const size = 8 * scale;
	const canvas = document.createElement('canvas');
	canvas.width = canvas.height = size;
	const ctx = canvas.getContext('2d', { willReadFrequently: true });
	if (!ctx) return new ImageData(size, size);
	ctx.strokeStyle = ink.rule;
	ctx.globalAlpha = ink.theme === 'day' ? 0.4 : 0.5;
	ctx.lineWidth = 0.8 * scale;
	ctx.beginPath();
	for (const shift of [-size, 0, size]) {
		ctx.moveTo(shift - 1, size + 1);
		ctx.lineTo(shift + size + 1, -1);
	}
	ctx.stroke();
	return ctx.getImageData(0, 0, size, size);
}

const rings = ({ outer, holes }: Polygon) => [outer, ...holes].map(lngLatRing);

const feature = (geometry: Feature['geometry']): Feature => ({ type: 'Feature', properties: {}, geometry });

/** Ten times the floor on every side: density is smoothed between cells and must not bleed through the outer wall. */
function farAround({ minX, minY, maxX, maxY }: ReturnType<typeof boundsOf>) {
	const far = 10 * Math.max(maxX - minX, maxY - minY, 1);
	return [
		[minX - far, minY - far],
		[maxX + far, minY - far],
		[maxX + far, maxY + far],
		[minX - far, maxY + far]
	] as const;
}

/** A line as wide as `metres` on the floor, never thinner than `leastPx`. */
function metreWidth(metres: number, leastPx: number): ExpressionSpecification {
	const zooms = Array.from({ length: 12 }, (_, i) => 14 + i);
	const stops = zooms.flatMap((zoom) => [zoom, Math.max(leastPx, metres * pxPerMetre(zoom))]);
	return ['interpolate', ['linear'], ['zoom'], ...stops] as unknown as ExpressionSpecification;
}
