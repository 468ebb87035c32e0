import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { clipHalfPlane, clipToConvex, convexPieces, flatArea, flatAreaInDisc, rectangle } from './convex.ts';

const square = rectangle(-1, -1, 1, 1);

describe('clipping', () => {
	it('returns the same array when nothing is cut and an empty one when all is', () => {
		expect(clipHalfPlane(square, 1, 0, 1)).toBe(square);
		expect(clipHalfPlane(square, 1, 0, -2)).toEqual([]);
		expect(flatArea(clipHalfPlane(square, 1, 0, 0))).toBe(2);
	});

	it('leaves no edge of rounding length, along which nothing could be clipped', () => {
		const cell = clipHalfPlane(square, 1, 1, 2 - 1e-14);
		expect(cell).toBe(square);
		const doubled = [-1, -1, 1, -1, 1, 1, 1 + 1e-16, 1 - 1e-16, -1, 1];
		expect(flatArea(clipToConvex(rectangle(-3, -3, 3, 3), doubled))).toBeCloseTo(4, 12);
	});

	it('finds nothing inside a speck', () => {
		const speck = [0, 0, 1e-14, 0, 1e-14, 1e-15, 0, 1e-15];
		expect(clipToConvex(rectangle(-3, -3, 3, 3), speck)).toEqual([]);
	});

	it('measures a concave ring exactly although the cut leaves edges there and back', () => {
		const u = [0, 0, 3, 0, 3, 3, 2, 3, 2, 1, 1, 1, 1, 3, 0, 3];
		expect(flatArea(clipToConvex(u, rectangle(0, 2, 3, 3)))).toBeCloseTo(2, 12);
	});
});

describe('area within a disc', () => {
	it('is the disc when the polygon holds it, the polygon when the disc does', () => {
		expect(flatAreaInDisc(rectangle(-5, -5, 5, 5), 0, 0, 2)).toBeCloseTo(4 * Math.PI, 12);
		expect(flatAreaInDisc(square, 0, 0, 2)).toBe(4);
		expect(flatAreaInDisc(square, 0, 0, Infinity)).toBe(4);
	});

	it('is a half on an edge, a quarter in a corner and nothing far away', () => {
		expect(flatAreaInDisc(rectangle(0, -9, 9, 9), 0, 0, 1)).toBeCloseTo(Math.PI / 2, 12);
		expect(flatAreaInDisc(rectangle(0, 0, 9, 9), 0, 0, 1)).toBeCloseTo(Math.PI / 4, 12);
		expect(flatAreaInDisc(rectangle(5, 5, 6, 6), 0, 0, 1)).toBeCloseTo(0, 12);
	});

	it('is the circular segment r²(α − sin α)/2 behind a chord', () => {
		const alpha = 2 * Math.acos(0.5);
		expect(flatAreaInDisc(rectangle(0.5, -9, 9, 9), 0, 0, 1)).toBeCloseTo((alpha - Math.sin(alpha)) / 2, 12);
	});

	it('adds up over the two parts of a cut polygon', () => {
		const number = fc.double({ min: -2, max: 2, noNaN: true });
		fc.assert(
			fc.property(number, number, fc.double({ min: 0.1, max: 3, noNaN: true }), number, (x, y, radius, at) => {
				const parts = [clipHalfPlane(square, 1, 0, at), clipHalfPlane(square, -1, 0, -at)];
				const sum = parts.reduce((total, part) => total + flatAreaInDisc(part, x, y, radius), 0);
				expect(sum).toBeCloseTo(flatAreaInDisc(square, x, y, radius), 9);
			})
		);
	});
});

it('tiles a polygon with a hole by convex pieces', () => {
	const pieces = convexPieces([rectangle(0, 0, 4, 4), rectangle(1, 1, 2, 3)]);
	expect(pieces.reduce((sum, piece) => sum + flatArea(piece), 0)).toBeCloseTo(14, 12);
	expect(pieces.every((piece) => flatArea(piece) > 0)).toBe(true);
});
