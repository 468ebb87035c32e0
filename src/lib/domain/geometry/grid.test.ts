import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { intersect } from './clipping.ts';
import { cellAreasWithin, cellIndex, createFloorGrid } from './grid.ts';
import { computeArea, computePolygonArea, isInside } from './polygon.ts';
import type { Polygon, Ring } from './types.ts';

const rectangle = (x: number, y: number, width: number, height: number): Ring => [
	[x, y],
	[x + width, y],
	[x + width, y + height],
	[x, y + height]
];
const floor: Polygon = {
	outer: [
		[0, 0],
		[12, 0],
		[12, 5],
		[7.3, 7.7],
		[0, 8]
	],
	holes: [rectangle(4.2, 3, 0.7, 2.1), rectangle(9, 1, 1, 1)]
};
const grid = createFloorGrid(floor);
const sum = (values: Float64Array) => values.reduce((total, value) => total + value, 0);

describe('floor grid', () => {
	it('has cells of exactly cell² inside, 0 outside, and all of the floor between', () => {
		expect([grid.cols, grid.rows]).toEqual([24, 16]);
		expect(grid.area[cellIndex(grid, 1.2, 1.2)]).toBe(0.25);
		expect(grid.area[cellIndex(grid, 9.6, 1.6)]).toBe(0);
		expect(grid.area[cellIndex(grid, 11.9, 7.9)]).toBe(0);
		expect(sum(grid.area)).toBeCloseTo(computePolygonArea(floor), 9);
	});

	it('samples a walkable point of its own in each cell with floor, and NaN elsewhere', () => {
		for (let index = 0; index < grid.area.length; index++) {
			const x = grid.sampleX[index]!;
			const y = grid.sampleY[index]!;
			if (grid.area[index] === 0) expect(x).toBeNaN();
			else {
				expect(isInside(floor, x, y)).toBe(true);
				expect(cellIndex(grid, x, y)).toBe(index);
			}
		}
	});

	it('samples beside a pillar that fills the middle of a cell', () => {
		const pierced: Polygon = { outer: rectangle(0, 0, 1, 1), holes: [rectangle(0.2, 0.2, 0.6, 0.6)] };
		const { area, sampleX, sampleY } = createFloorGrid(pierced, 1);
		expect(area[0]).toBeCloseTo(0.64, 12);
		expect(isInside(pierced, sampleX[0]!, sampleY[0]!)).toBe(true);
	});

	it('refuses a floor without area and a cell without size', () => {
		expect(() =>
			createFloorGrid({
				outer: [
					[0, 0],
					[1, 1]
				],
				holes: []
			})
		).toThrow(Failure);
		expect(() => createFloorGrid(floor, 0)).toThrow(Failure);
	});

	it('has as many columns as fit, whatever the division comes to', () => {
		expect(createFloorGrid({ outer: rectangle(0, 0, 1.2, 0.3), holes: [] }, 0.1).cols).toBe(12);
	});
});

describe('cell of a point', () => {
	const frame = { x0: 0, y0: 0, cell: 1, cols: 2, rows: 2 };

	it('is half-open, closed at the far rim only: everybody is in one cell', () => {
		expect(cellIndex(frame, 1, 0.5)).toBe(1);
		expect(cellIndex(frame, 0.999, 1)).toBe(2);
		expect(cellIndex(frame, 2, 2)).toBe(3);
		expect(cellIndex(frame, 0, 0)).toBe(0);
	});

	it('is −1 outside and for NaN', () => {
		expect(cellIndex(frame, -0.001, 1)).toBe(-1);
		expect(cellIndex(frame, 1, 2.001)).toBe(-1);
		expect(cellIndex(frame, NaN, 1)).toBe(-1);
	});
});

describe('cells of a zone', () => {
	it('add up to the walkable floor in it', () => {
		const at = fc.double({ min: -2, max: 12, noNaN: true });
		const side = fc.double({ min: 0.1, max: 12, noNaN: true });
		fc.assert(
			fc.property(at, at, side, side, (x, y, width, height) => {
				const zone = { outer: rectangle(x, y, width, height), holes: [] };
				const { area, total } = cellAreasWithin(grid, floor, zone);
				expect(total).toBeCloseTo(computeArea(intersect([floor], [zone])), 9);
				expect(sum(area)).toBeCloseTo(total, 7);
			}),
			{ numRuns: 40 }
		);
	});

	it('are the cells of the floor for a zone that covers it', () => {
		const { index, area, total } = cellAreasWithin(grid, floor, { outer: rectangle(-1, -1, 20, 20), holes: [] });
		expect(total).toBeCloseTo(computePolygonArea(floor), 9);
		index.forEach((cell, k) => expect(area[k]).toBeCloseTo(grid.area[cell]!, 12));
		expect(index).toHaveLength(grid.area.filter((value) => value > 0).length);
	});

	it('are none off the floor', () => {
		const { index, total } = cellAreasWithin(grid, floor, { outer: rectangle(50, 50, 2, 2), holes: [] });
		expect(index).toHaveLength(0);
		expect(total).toBe(0);
	});
});
