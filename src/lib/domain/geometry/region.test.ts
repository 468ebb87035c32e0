import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { intersect } from './clipping.ts';
import { rectangle } from './convex.ts';
import { computeArea, computePolygonArea, isInside } from './polygon.ts';
import { createRegion, regionOf } from './region.ts';
import type { Polygon } from './types.ts';

/** A concave hall with a round wall and two pillars. */
const hall: Polygon = {
	outer: [
		[0, 0],
		[20, 0],
		...Array.from({ length: 40 }, (_, k): [number, number] => [
			20 - 6 * Math.sin((Math.PI * k) / 40),
			12 * (k / 40)
		]).slice(1),
		[20, 12],
		[13, 12],
		[13, 9],
		[9, 9],
		[9, 12],
		[0, 12]
	],
	holes: [
		[
			[4, 4],
			[4, 6],
			[6, 6],
			[6, 4]
		],
		[
			[11, 3],
			[11, 4],
			[12, 4]
		]
	]
};

const coordinate = fc.double({ min: -1, max: 21, noNaN: true });

describe('region', () => {
	it('measures any rectangle as polygon clipping does', () => {
		fc.assert(
			fc.property(coordinate, coordinate, fc.double({ min: 0.1, max: 9, noNaN: true }), (x, y, side) => {
				const box: Polygon = {
					outer: [
						[x, y],
						[x + side, y],
						[x + side, y + side],
						[x, y + side]
					],
					holes: []
				};
				const measured = regionOf(hall).areaWithin(rectangle(x, y, x + side, y + side), 0, 0, Infinity);
				expect(measured).toBeCloseTo(computeArea(intersect([hall], [box])), 8);
			}),
			{ numRuns: 60 }
		);
	});

	it('holds the same points as the polygon', () => {
		fc.assert(
			fc.property(coordinate, coordinate, (x, y) => {
				expect(regionOf(hall).contains(x, y)).toBe(isInside(hall, x, y));
			})
		);
	});

	it('counts its borders as inside, on lines it was split along too', () => {
		for (const [x, y] of [
			[0, 0],
			[10, 9],
			[5, 4],
			[4, 5],
			[10, 0],
			[0, 6],
			[13, 12]
		] as const) {
			expect(regionOf(hall).contains(x, y)).toBe(true);
		}
		expect(regionOf(hall).contains(5, 5)).toBe(false);
		expect(regionOf(hall).contains(NaN, 5)).toBe(false);
	});

	it('has the area of its polygons in either direction of the rings', () => {
		const turned = { outer: [...hall.outer].reverse(), holes: hall.holes.map((ring) => [...ring].reverse()) };
		expect(regionOf(hall).area).toBeCloseTo(computePolygonArea(hall), 9);
		expect(regionOf(turned).area).toBeCloseTo(computePolygonArea(hall), 9);
	});

	it('is empty without polygons', () => {
		const nothing = createRegion([]);
		expect(nothing.area).toBe(0);
		expect(nothing.areaWithin(rectangle(0, 0, 1, 1), 0, 0, 1)).toBe(0);
		expect(nothing.contains(0, 0)).toBe(false);
		expect(nothing.ringsWithin(rectangle(0, 0, 1, 1))).toEqual([]);
	});
});
