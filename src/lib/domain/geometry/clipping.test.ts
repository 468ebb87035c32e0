import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { intersect, subtract, unite } from './clipping.ts';
import { computeArea } from './polygon.ts';
import type { Polygon } from './types.ts';

const rectangle = (x: number, y: number, width: number, height: number): Polygon => ({
	outer: [
		[x, y],
		[x + width, y],
		[x + width, y + height],
		[x, y + height]
	],
	holes: []
});

it('counts two overlapping footprints once: 57 m², not 61 m²', () => {
	expect(computeArea(unite([[rectangle(0, 0, 6, 6)], [rectangle(4, 4, 5, 5)]]))).toBe(57);
});

it('cuts out a hole and keeps it as one', () => {
	const [ring] = subtract([rectangle(0, 0, 4, 4)], [rectangle(1, 1, 1, 1)]);
	expect(ring!.holes).toHaveLength(1);
	expect(computeArea([ring!])).toBe(15);
});

describe('empty and degenerate input', () => {
	const line: Polygon = {
		outer: [
			[0, 0],
			[1, 1],
			[2, 2]
		],
		holes: []
	};
	const room = [rectangle(0, 0, 1, 1)];

	it('gives an empty area, not an error', () => {
		expect(intersect([], room)).toEqual([]);
		expect(intersect(room, [])).toEqual([]);
		expect(intersect([line], room)).toEqual([]);
		expect(unite([])).toEqual([]);
		expect(unite([[], [line]])).toEqual([]);
		expect(subtract([], room)).toEqual([]);
		expect(computeArea(subtract(room, []))).toBe(1);
	});

	it('gives an empty area where polygons only touch', () => {
		expect(intersect(room, [rectangle(1, 0, 1, 1)])).toEqual([]);
		expect(intersect(room, [rectangle(5, 5, 1, 1)])).toEqual([]);
	});

	it('refuses a corner that is not a number', () => {
		expect(() => intersect(room, [rectangle(NaN, 0, 1, 1)])).toThrow(Failure);
	});
});

it('keeps |a| + |b| = |a ∪ b| + |a ∩ b| and |a| = |a ∩ b| + |a − b|', () => {
	const side = fc.integer({ min: 1, max: 40 }).map((tenths) => tenths / 10);
	const at = fc.integer({ min: -30, max: 30 }).map((tenths) => tenths / 10);
	const any = fc.tuple(at, at, side, side).map((numbers) => [rectangle(...numbers)]);
	fc.assert(
		fc.property(any, any, (a, b) => {
			const both = computeArea(intersect(a, b));
			expect(computeArea(unite([a, b])) + both).toBeCloseTo(computeArea(a) + computeArea(b), 9);
			expect(computeArea(subtract(a, b)) + both).toBeCloseTo(computeArea(a), 9);
		})
	);
});
