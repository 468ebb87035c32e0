import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { floorAt, fromLngLat, lngLatRing, pxPerMetre, screenX, screenY, toLngLat, zoomAt } from './projection.ts';

const metre = fc.double({ min: -2000, max: 2000, noNaN: true });

describe('projection', () => {
	it('comes back to the same millimetre', () => {
		fc.assert(
			fc.property(metre, metre, (x, y) => {
				const back = fromLngLat(...toLngLat(x, y));
				expect(back.x).toBeCloseTo(x, 4);
				expect(back.y).toBeCloseTo(y, 4);
			})
		);
	});

	it('keeps scale in both directions: equal metres are equal Mercator steps wherever they lie', () => {
		// Mercator ordinate of a latitude: R · ln tan(π/4 + φ/2) (Snyder 1987, Map Projections: A Working Manual, eq. 7-2; from memory)
		const ordinate = (y: number) => 6_378_137 * Math.log(Math.tan(Math.PI / 4 + (toLngLat(0, y)[1] * Math.PI) / 360));
		expect(ordinate(1500) - ordinate(1400)).toBeCloseTo(100, 5);
		expect(ordinate(100) - ordinate(0)).toBeCloseTo(100, 5);
	});

	it('scale and zoom are inverse, one zoom step doubles', () => {
		expect(zoomAt(pxPerMetre(19.25))).toBeCloseTo(19.25, 9);
		expect(pxPerMetre(20) / pxPerMetre(19)).toBeCloseTo(2, 12);
	});

	it('closes rings', () => {
		const ring = lngLatRing([
			[0, 0],
			[4, 0],
			[4, 3]
		]);
		expect(ring).toHaveLength(4);
		expect(ring[3]).toEqual(ring[0]);
	});
});

it('a pixel and its floor point agree, y pointing up', () => {
	const view = { centre: { x: 30, y: 20 }, pxPerM: 8, width: 800, height: 600 };
	expect([screenX(view, 30), screenY(view, 20)]).toEqual([400, 300]);
	expect(screenY(view, 21)).toBe(292);
	expect(floorAt(view, screenX(view, 12.5), screenY(view, 44))).toEqual({ x: 12.5, y: 44 });
});
