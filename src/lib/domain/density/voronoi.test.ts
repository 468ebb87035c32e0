import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import { clipHalfPlane, flatArea, type Flat } from '../geometry/convex.ts';
import { createFloorGrid } from '../geometry/grid.ts';
import { computePolygonArea } from '../geometry/polygon.ts';
import type { Polygon } from '../geometry/types.ts';
import { computeVoronoiDensity, computeZoneVoronoi } from './voronoi.ts';
import { createVoronoi } from './voronoi-cells.ts';

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
const HALL: Polygon = {
	outer: rectangle(0, 0, 20, 12).outer,
	holes: [rectangle(4, 4, 2, 2).outer, rectangle(14, 3, 2.5, 1.5).outer]
};
const U_SHAPE: Polygon = {
	outer: [
		[0, 0],
		[9, 0],
		[9, 8],
		[6, 8],
		[6, 2],
		[3, 2],
		[3, 8],
		[0, 8]
	],
	holes: []
};
const flat = (...points: (readonly [number, number])[]) => Float64Array.from(points.flat());
const sum = (values: Iterable<number>) => [...values].reduce((total, value) => total + value, 0);

/** Up to `maxLength` persons anywhere round the hall, in millimetres, so that some share a place or a line. */
const crowd = (maxLength: number) =>
	fc
		.array(fc.tuple(fc.integer({ min: -500, max: 20_500 }), fc.integer({ min: -500, max: 12_500 })), {
			size: 'max',
			maxLength
		})
		.map((points) => Float64Array.from(points.flat(), (millimetres) => millimetres / 1000));

// Definition: Steffen & Seyfried 2010, Physica A 389:1902 (from memory); the cases are exact by construction.
describe('zone density', () => {
	it('is 1 on a unit lattice, whatever the measurement polygon', () => {
		const points = flat(...Array.from({ length: 25 }, (_, k) => [0.5 + (k % 5), 0.5 + Math.floor(k / 5)] as const));
		const measurement: Polygon = {
			outer: [
				[1.2, 0.7],
				[3.9, 1.1],
				[4.3, 3.8],
				[0.9, 4.4]
			],
			holes: []
		};
		const { density } = computeVoronoiDensity({ points, walkable: rectangle(0, 0, 5, 5), measurement, cutoff: null });
		expect(density).toBeCloseTo(1, 10);
	});

	it('is 1/|floor| for one person without a cutoff, 1/(πr²) inside the disc with one', () => {
		const measurement = rectangle(4.5, 4.5, 1, 1);
		const one = { points: flat([5, 5]), walkable: ROOM, measurement };
		expect(computeVoronoiDensity({ ...one, cutoff: null }).density).toBeCloseTo(0.01, 12);
		expect(computeVoronoiDensity({ ...one, cutoff: { radius: 0.8 } }).density).toBeCloseTo(1 / (Math.PI * 0.64), 12);
	});

	it('is 0 on an empty floor and null where there is no floor', () => {
		const [inside, outside] = computeZoneVoronoi(flat(), ROOM, [rectangle(3, 3, 4, 4), rectangle(50, 50, 1, 1)], null);
		expect(inside).toEqual({ density: 0, densityOwnPiece: 0, measuredArea: 16, coverage: 1, persons: 0 });
		expect(outside!.density).toBeNull();
		expect(outside!.coverage).toBeNull();
	});

	it('shares one cell among persons at the very same place', () => {
		const got = computeVoronoiDensity({
			points: flat([2, 5], [2, 5], [7, 5]),
			walkable: ROOM,
			measurement: rectangle(0, 0, 4, 10),
			cutoff: null
		});
		expect([...got.multiplicity]).toEqual([2, 1]);
		expect(got.density).toBeCloseTo(2 / 45, 12);
	});

	it('drops and counts persons outside the floor and positions that are not numbers', () => {
		const cells = createVoronoi(flat([-0.2, 5], [0, 5], [NaN, 1], [4, 5]), ROOM, null);
		expect([...cells.cellOf]).toEqual([-1, 0, -1, 1]);
		expect([cells.used, cells.outsideWalkable]).toEqual([2, 2]);
	});

	it('leaves the points handed over as they were, collinear ones too', () => {
		const points = flat(...Array.from({ length: 30 }, (_, k) => [0.3 * k + 0.1, 5] as const));
		const before = points.slice();
		const { areas } = createVoronoi(points, ROOM, null);
		expect(points).toEqual(before);
		expect(areas[7]).toBeCloseTo(3, 9);
		expect(sum(areas)).toBeCloseTo(100, 9);
	});

	it('refuses a cutoff that is not positive', () => {
		expect(() => createVoronoi(flat([1, 1]), ROOM, { radius: 0 })).toThrow(Failure);
	});
});

describe('what naive code gets wrong', () => {
	it('unobserved is not empty: only observed floor is in the denominator, none of it is null', () => {
		const points = flat([1, 1], [2, 3], [4, 9], [3.3, 6.1]);
		const [half] = computeZoneVoronoi(points, ROOM, [ROOM], null, [rectangle(0, 0, 5, 10)]);
		expect(half!.measuredArea).toBe(50);
		expect(half!.coverage).toBe(0.5);
		expect(half!.density).toBeGreaterThan(0.04);
		const [none] = computeZoneVoronoi(points, ROOM, [rectangle(0, 0, 5, 5)], null, [rectangle(8, 8, 1, 1)]);
		expect(none).toMatchObject({ density: null, coverage: 0, measuredArea: 0 });
	});

	it('without a cutoff the rim cells of a cluster swallow the empty hall', () => {
		const points = flat(
			...Array.from({ length: 16 }, (_, k) => [9 + 0.5 * (k % 4), 5 + 0.5 * Math.floor(k / 4)] as const)
		);
		const zone = [rectangle(8.5, 4.5, 2.5, 2.5)];
		const [open] = computeZoneVoronoi(points, HALL, zone, null);
		const [cut] = computeZoneVoronoi(points, HALL, zone, { radius: 1 });
		expect(cut!.density! / open!.density!).toBeGreaterThan(1.5);
	});

	it('pillars leave the denominator', () => {
		const [zone] = computeZoneVoronoi(flat([10, 6]), HALL, [rectangle(3, 3, 4, 4)], null);
		expect(zone!.measuredArea).toBeCloseTo(12, 12);
	});

	it('cells do not jump walls when only the own piece counts', () => {
		const points = flat([1.5, 6], [2.7, 3], [1, 3.5], [7.5, 1]);
		const far = { points, walkable: U_SHAPE, measurement: rectangle(6.2, 3, 2.6, 4.5) };
		const got = computeVoronoiDensity({ ...far, cutoff: null });
		expect(got.densityOwnPiece).toBeLessThan(got.density!);
		expect(sum(got.cellAreas)).toBeCloseTo(computePolygonArea(U_SHAPE), 9);
	});

	it('a person beside a thin wall is not spread behind it', () => {
		const split: Polygon = { outer: ROOM.outer, holes: [rectangle(5, 1, 0.1, 8).outer] };
		const walkable = split;
		const got = computeVoronoiDensity({
			points: flat([4.8, 5]),
			walkable,
			measurement: rectangle(5.1, 0, 4.9, 10),
			cutoff: { radius: 1 }
		});
		expect(got.density).toBeGreaterThan(0);
		expect(got.densityOwnPiece).toBe(0);
		// Half-disc to the left of the wall: segment of a circle with the wall's face 0.2 m from the centre.
		expect(got.cellAreasOwnPiece[0]).toBeCloseTo(Math.PI - (Math.acos(0.2) - 0.2 * Math.sqrt(0.96)), 9);
	});

	it('two parts that touch in one corner are two parts', () => {
		// The bisector of these two is x = 5, where the tip of the wedge lies.
		const wedged: Polygon = {
			outer: [
				[0, 0],
				[10, 0],
				[10, 10],
				[0, 10],
				[0, 6],
				[5, 5],
				[0, 4]
			],
			holes: []
		};
		const { areas, ownAreas } = createVoronoi(flat([2, 1], [8, 1]), wedged, null);
		expect(areas[0]).toBeCloseTo(45, 9);
		expect(ownAreas[0]).toBeCloseTo(22.5, 9);
		expect(ownAreas[1]).toBeCloseTo(50, 9);
	});
});

describe('invariants', () => {
	const cutoffs = fc.constantFrom(null, { radius: 1 }, { radius: 2.5 });

	it('integrates to the number of persons on the floor', () => {
		fc.assert(
			fc.property(crowd(60), cutoffs, (points, cutoff) => {
				const got = computeVoronoiDensity({ points, walkable: HALL, measurement: HALL, cutoff });
				expect(got.persons).toBeCloseTo(got.used, 7);
				expect(got.densityOwnPiece! * got.measuredArea).toBeCloseTo(got.used, 7);
				expect(got.used + got.outsideWalkable).toBe(points.length / 2);
			})
		);
	});

	it('tiles the floor without a cutoff', () => {
		fc.assert(
			fc.property(crowd(60), (points) => {
				const { areas, used } = createVoronoi(points, HALL, null);
				expect(sum(areas)).toBeCloseTo(used > 0 ? computePolygonArea(HALL) : 0, 6);
			})
		);
	});

	it('tiles the floor with persons on a lattice, where many are equally near', () => {
		const spot = fc.tuple(fc.nat(40), fc.nat(24));
		const lattice = fc
			.array(spot, { size: 'max', maxLength: 100 })
			.map((spots) => flat(...spots.map(([i, j]) => [i / 2, j / 2] as const)));
		fc.assert(
			fc.property(lattice, cutoffs, (points, cutoff) => {
				const got = computeVoronoiDensity({ points, walkable: HALL, measurement: HALL, cutoff });
				expect(got.densityOwnPiece! * got.measuredArea).toBeCloseTo(got.used, 7);
				if (cutoff === null && got.used > 0) expect(sum(got.cellAreas)).toBeCloseTo(computePolygonArea(HALL), 7);
			})
		);
	});

	it('adds up over zones that tile the floor', () => {
		const zones = [rectangle(0, 0, 5, 12), rectangle(5, 0, 15, 4.5), rectangle(5, 4.5, 15, 7.5)];
		fc.assert(
			fc.property(crowd(40), cutoffs, (points, cutoff) => {
				const parts = computeZoneVoronoi(points, HALL, zones, cutoff);
				expect(sum(parts.map(({ persons }) => persons))).toBeCloseTo(createVoronoi(points, HALL, cutoff).used, 7);
			})
		);
	});

	it('does not change with the order of persons, nor when everything is moved and turned', () => {
		const angle = 0.7;
		const move = (x: number, y: number) =>
			[Math.cos(angle) * x - Math.sin(angle) * y + 30, Math.sin(angle) * x + Math.cos(angle) * y - 12] as const;
		const moved = ({ outer, holes }: Polygon): Polygon => ({
			outer: outer.map(([x, y]) => move(x, y)),
			holes: holes.map((ring) => ring.map(([x, y]) => move(x, y)))
		});
		const zone = rectangle(3, 2, 9, 7);
		const turned = [moved(HALL), moved(zone)] as const;
		// Kept off the walls, where rounding of the turned walls decides who is on the floor.
		const inside = fc
			.array(fc.tuple(fc.integer({ min: 100, max: 3900 }), fc.integer({ min: 100, max: 11_900 })), {
				size: 'max',
				maxLength: 40
			})
			.map((points) => Float64Array.from(points.flat(), (value) => value / 1000));
		fc.assert(
			fc.property(inside, cutoffs, (points, cutoff) => {
				const [plain] = computeZoneVoronoi(points, HALL, [zone], cutoff);
				const pairs = Array.from(
					{ length: points.length / 2 },
					(_, i) => [points[2 * i]!, points[2 * i + 1]!] as const
				);
				const [reversed] = computeZoneVoronoi(flat(...[...pairs].reverse()), HALL, [zone], cutoff);
				const [elsewhere] = computeZoneVoronoi(
					flat(...pairs.map(([x, y]) => move(x, y))),
					turned[0],
					[turned[1]],
					cutoff
				);
				expect(reversed!.persons).toBeCloseTo(plain!.persons, 7);
				expect(elsewhere!.persons).toBeCloseTo(plain!.persons, 6);
			})
		);
	});

	it('is the same over observed cells as over the polygon they make up', () => {
		const grid = createFloorGrid(HALL, 0.5);
		const seen = new Uint8Array(grid.area.length);
		for (let row = 3; row < 17; row++) for (let col = 5; col < 23; col++) seen[row * grid.cols + col] = 1;
		const observed = [rectangle(2.5, 1.5, 9, 7)];
		const zone = rectangle(1.3, 2.2, 8, 8);
		fc.assert(
			fc.property(crowd(40), cutoffs, (points, cutoff) => {
				const [byCells] = computeZoneVoronoi(points, HALL, [zone], cutoff, { grid, seen });
				const [byArea] = computeZoneVoronoi(points, HALL, [zone], cutoff, observed);
				expect(byCells!.measuredArea).toBeCloseTo(byArea!.measuredArea, 9);
				expect(byCells!.persons).toBeCloseTo(byArea!.persons, 7);
				expect(byCells!.densityOwnPiece).toBeCloseTo(byArea!.densityOwnPiece!, 7);
			})
		);
	});

	it('gives the cells that comparing everybody with everybody gives', () => {
		fc.assert(
			fc.property(crowd(80), fc.nat(79), (points, pick) => {
				const { areas, points: distinct } = createVoronoi(points, ROOM, null);
				fc.pre(areas.length > 0);
				const i = pick % areas.length;
				const [px, py] = [distinct[2 * i]!, distinct[2 * i + 1]!];
				let cell: Flat = [0, 0, 10, 0, 10, 10, 0, 10];
				for (let j = 0; j < distinct.length; j += 2) {
					if (j === 2 * i) continue;
					const [qx, qy] = [distinct[j]!, distinct[j + 1]!];
					const [nx, ny] = [qx - px, qy - py];
					cell = clipHalfPlane(cell, nx, ny, (nx * (px + qx) + ny * (py + qy)) / 2);
				}
				expect(areas[i]).toBeCloseTo(flatArea(cell), 8);
			})
		);
	});
});
