import { describe, expect, it } from 'vitest';
import type { Polygon } from '../geometry/types.ts';
import { computeClassicDensity, countByCell } from './classic.ts';

const rectangle = (x: number, y: number, width: number, height: number): Polygon => ({
	outer: [
		[x, y],
		[x + width, y],
		[x + width, y + height],
		[x, y + height]
	],
	holes: []
});
const ROOM = rectangle(0, 0, 10, 10);
const flat = (...points: (readonly [number, number])[]) => Float64Array.from(points.flat());
const base = { points: flat(), measurement: ROOM, walkable: null, observed: null };

it('is 0 where it was seen that nobody is there', () => {
	expect(computeClassicDensity(base)).toEqual({ density: 0, count: 0, observedArea: 100, coverage: 1 });
});

describe('what naive code gets wrong', () => {
	it('unobserved is not empty: nothing observed has no density', () => {
		const got = computeClassicDensity({
			...base,
			measurement: rectangle(3, 3, 4, 4),
			observed: [rectangle(8, 8, 1, 1)]
		});
		expect(got).toEqual({ density: null, count: 0, observedArea: 0, coverage: 0 });
	});

	it('counts persons and floor of the observed half only', () => {
		const points = flat([1, 1], [2, 3], [4.5, 9], [7, 7]);
		const got = computeClassicDensity({ ...base, points, observed: [rectangle(0, 0, 5, 10)] });
		expect(got).toEqual({ density: 0.06, count: 3, observedArea: 50, coverage: 0.5 });
	});

	it('overlapping footprints and who stands in both count once', () => {
		const observed = [rectangle(0, 0, 6, 6), rectangle(4, 4, 5, 5)];
		const got = computeClassicDensity({ ...base, points: flat([5, 5], [1, 1], [9.5, 9.5]), observed });
		expect(got.observedArea).toBe(57);
		expect(got.count).toBe(2);
	});

	it('a pillar is not floor', () => {
		const walkable: Polygon = { ...ROOM, holes: [rectangle(4, 3, 4, 2).outer] };
		const measurement = rectangle(3, 2, 6, 4);
		const got = computeClassicDensity({ ...base, points: flat([3.5, 2.5], [6, 5.5]), measurement, walkable });
		expect(got.observedArea).toBe(16);
		expect(got.density).toBe(0.125);
	});

	it('a person on the line between two zones is never in both, and NaN in none', () => {
		const points = flat([5, 5], [NaN, 2]);
		const counts = [rectangle(0, 0, 5, 10), rectangle(5, 0, 5, 10)].map(
			(measurement) => computeClassicDensity({ ...base, points, measurement }).count
		);
		expect(counts).toEqual([0, 0]);
	});

	it('people on cell edges are counted exactly once', () => {
		const points = flat([1, 0.5], [1, 1], [2, 2], [0, 0], [0, 1.5], [0.5, 1]);
		const counts = countByCell({ x0: 0, y0: 0, cell: 1, cols: 2, rows: 2 }, points);
		expect([...counts]).toEqual([1, 1, 2, 2]);
	});
});
