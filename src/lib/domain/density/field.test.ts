import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { cellIndex, createFloorGrid } from '../geometry/grid.ts';
import type { Polygon } from '../geometry/types.ts';
import { computeDensityField } from './field.ts';
import { kernelWeight } from './kernel.ts';

const FLOOR: Polygon = {
	outer: [
		[0, 0],
		[14, 0],
		[14, 6.3],
		[6, 6.3],
		[4.2, 9],
		[0, 9]
	],
	holes: [
		[
			[3, 3],
			[3, 4.4],
			[4.4, 4.4],
			[4.4, 3]
		]
	]
};
const grid = createFloorGrid(FLOOR, 0.5);
const all = new Uint8Array(grid.area.length).fill(1);

/** Σ density · area over measured cells. */
const personsIn = (field: Float32Array) =>
	field.reduce((sum, density, i) => (Number.isNaN(density) ? sum : sum + density * grid.area[i]!), 0);

const position = fc.tuple(fc.double({ min: -1, max: 15, noNaN: true }), fc.double({ min: -1, max: 10, noNaN: true }));
const crowd = fc.array(position, { maxLength: 40 }).map((points) => Float64Array.from(points.flat()));
const marks = fc.array(fc.boolean(), { minLength: all.length, maxLength: all.length });

describe('density field', () => {
	it('sums to the persons whose cell is observed, whatever was observed', () => {
		fc.assert(
			fc.property(crowd, marks, fc.double({ min: 0.02, max: 3, noNaN: true }), (points, seen, radius) => {
				const observed = Uint8Array.from(seen, Number);
				let counted = 0;
				for (let i = 0; i < points.length; i += 2) {
					const cell = cellIndex(grid, points[i]!, points[i + 1]!);
					if (cell >= 0 && observed[cell] === 1 && grid.area[cell]! > 0) counted += 1;
				}
				expect(personsIn(computeDensityField(grid, observed, points, radius))).toBeCloseTo(counted, 4);
			})
		);
	});

	it('is NaN where nobody looked and where there is no floor, 0 where nobody stands', () => {
		const observed = all.slice();
		observed[cellIndex(grid, 1.1, 1.1)] = 0;
		const field = computeDensityField(grid, observed, new Float64Array(), 1);
		expect(field[cellIndex(grid, 1.1, 1.1)]).toBeNaN();
		expect(field[cellIndex(grid, 3.7, 3.7)]).toBeNaN();
		expect(field[cellIndex(grid, 13.9, 8.9)]).toBeNaN();
		expect(field[cellIndex(grid, 2.1, 1.1)]).toBe(0);
	});

	it('follows the kernel at a point, far from walls', () => {
		const field = computeDensityField(grid, all, Float64Array.of(9, 3), 0.9);
		for (const [x, y] of [
			[9.25, 3.25],
			[8.25, 2.75],
			[10.25, 3.75]
		] as const) {
			const expected = kernelWeight((x - 9) ** 2 + (y - 3) ** 2, 0.9);
			expect(field[cellIndex(grid, x, y)]! / expected).toBeCloseTo(1, 2);
		}
	});

	it('is not halved at a wall', () => {
		const free = computeDensityField(grid, all, Float64Array.of(9.25, 3.25), 1);
		const wall = computeDensityField(grid, all, Float64Array.of(9.25, 0.25), 1);
		expect(wall[cellIndex(grid, 9.25, 0.25)]).toBeGreaterThan(1.3 * free[cellIndex(grid, 9.25, 3.25)]!);
	});

	it('does not change with the order of persons', () => {
		const forth = computeDensityField(grid, all, Float64Array.of(1, 1, 5, 2, 9, 5), 1);
		const back = computeDensityField(grid, all, Float64Array.of(9, 5, 5, 2, 1, 1), 1);
		expect(forth.some((density) => density > 0.1)).toBe(true);
		forth.forEach((density, i) => expect(back[i]! - density || 0).toBeCloseTo(0, 6));
	});

	it('leaves out positions off the floor and ones that are not numbers', () => {
		const field = computeDensityField(grid, all, Float64Array.of(-5, 3, NaN, 1, 3.7, 3.7, 1, 1), 1);
		expect(personsIn(field)).toBeCloseTo(1, 5);
	});

	it('refuses a radius that is not positive and marks that do not fit', () => {
		expect(() => computeDensityField(grid, all, new Float64Array(), 0)).toThrow(Failure);
		expect(() => computeDensityField(grid, new Uint8Array(3), new Float64Array(), 1)).toThrow(Failure);
	});
});
