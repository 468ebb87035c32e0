import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	boundsOf,
	centroidOf,
	computeArea,
	computePolygonArea,
	computeRingArea,
	computeSignedArea,
	distanceToSegment,
	edgesOf,
	isInside,
	isInsideRing,
	isStrictlyInside
} from './polygon.ts';
import type { Polygon, Ring } from './types.ts';

const square: Ring = [
	[0, 0],
	[4, 0],
	[4, 4],
	[0, 4]
];
const hole: Ring = [
	[1, 1],
	[1, 2],
	[2, 2],
	[2, 1]
];
const room: Polygon = { outer: square, holes: [hole] };

describe('area', () => {
	it('is positive in either direction, the hole left out', () => {
		expect(computeSignedArea(square)).toBe(16);
		expect(computeSignedArea([...square].reverse())).toBe(-16);
		expect(computeRingArea([...square].reverse())).toBe(16);
		expect(computePolygonArea(room)).toBe(15);
		expect(computeArea([room, { outer: square, holes: [] }])).toBe(31);
	});

	it('is 0 for nothing, a point and a line', () => {
		expect(computeArea([])).toBe(0);
		expect(computeRingArea([])).toBe(0);
		expect(computeRingArea([[1, 1]])).toBe(0);
		expect(
			computeRingArea([
				[0, 0],
				[1, 1],
				[2, 2]
			])
		).toBe(0);
	});

	it('does not cancel at map coordinates of millions of metres', () => {
		const far = square.map(([x, y]) => [x + 5_400_000, y - 5_400_000] as const);
		expect(computeRingArea(far)).toBe(16);
	});
});

describe('containment', () => {
	it('counts every border as inside, that of a hole too', () => {
		expect(isInside(room, 0, 2)).toBe(true);
		expect(isInside(room, 4, 4)).toBe(true);
		expect(isInside(room, 1, 1.5)).toBe(true);
		expect(isInside(room, 1.5, 1.5)).toBe(false);
		expect(isInside(room, 3, 3)).toBe(true);
		expect(isInside(room, 4.001, 2)).toBe(false);
	});

	it('counts no border as strictly inside', () => {
		expect(isStrictlyInside(room, 0, 2)).toBe(false);
		expect(isStrictlyInside(room, 1, 1.5)).toBe(false);
		expect(isStrictlyInside(room, 3, 3)).toBe(true);
	});

	it('says outside for NaN and for an empty ring', () => {
		expect(isInside(room, NaN, 1)).toBe(false);
		expect(isInsideRing([], 0, 0)).toBe(false);
	});

	it('crosses a corner at the height of the point once', () => {
		const diamond: Ring = [
			[0, -1],
			[1, 0],
			[0, 1],
			[-1, 0]
		];
		expect(isInsideRing(diamond, 0, 0)).toBe(true);
		expect(isInsideRing(diamond, -2, 0)).toBe(false);
		expect(isInsideRing(diamond, 2, 0)).toBe(false);
	});
});

it('gives bounds of the outer ring and edges of all rings', () => {
	expect(boundsOf(room)).toEqual({ minX: 0, minY: 0, maxX: 4, maxY: 4 });
	expect(edgesOf(room)).toHaveLength(8);
	const doubled: Ring = [...square, [0, 4]];
	expect(edgesOf({ outer: doubled, holes: [] })).toHaveLength(4);
});

it('measures the distance to a segment beyond its ends and to one without length', () => {
	expect(distanceToSegment(0, 1, { ax: -1, ay: 0, bx: 1, by: 0 })).toBe(1);
	expect(distanceToSegment(4, 4, { ax: -1, ay: 0, bx: 1, by: 0 })).toBe(5);
	expect(distanceToSegment(3, 4, { ax: 0, ay: 0, bx: 0, by: 0 })).toBe(5);
});

describe('centroid', () => {
	it('leaves out the hole', () => {
		const { x, y } = centroidOf(room);
		expect(x).toBeCloseTo((16 * 2 - 1.5) / 15, 12);
		expect(y).toBeCloseTo((16 * 2 - 1.5) / 15, 12);
	});

	it('is the mean of the corners without area', () => {
		expect(
			centroidOf({
				outer: [
					[1, 1],
					[3, 5]
				],
				holes: []
			})
		).toEqual({ x: 2, y: 3 });
		expect(centroidOf({ outer: [], holes: [] }).x).toBeNaN();
	});

	it('moves with the polygon', () => {
		const shift = fc.double({ min: -1000, max: 1000, noNaN: true });
		fc.assert(
			fc.property(shift, shift, (dx, dy) => {
				const move = (ring: Ring): Ring => ring.map(([x, y]) => [x + dx, y + dy] as const);
				const moved = centroidOf({ outer: move(square), holes: [move(hole)] });
				expect(moved.x - dx).toBeCloseTo(centroidOf(room).x, 8);
				expect(moved.y - dy).toBeCloseTo(centroidOf(room).y, 8);
			})
		);
	});
});
