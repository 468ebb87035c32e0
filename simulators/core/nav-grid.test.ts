import { describe, expect, it } from 'vitest';
import { SMALL_FLOOR } from '../../tests/support/fleet-venue.ts';
import { computeDistanceField, createNavGrid, distanceAt, findRoute, nearestFree } from './nav-grid.ts';
import { createWallGrid } from './wall-grid.ts';

const grid = createNavGrid(SMALL_FLOOR, 0.4);

describe('wall grid', () => {
	const walls = createWallGrid([{ ax: 0, ay: 0, bx: 0, by: 4 }]);

	it('is blocked by a wall between two points and not beside it', () => {
		expect(walls.isBlocked(-1, 2, 1, 2)).toBe(true);
		expect(walls.isBlocked(-1, 5, 1, 5)).toBe(false);
		expect(walls.isBlocked(-3, 2, -0.01, 2)).toBe(false);
	});

	it('sees a wall far along a long line', () => {
		const long = createWallGrid([
			{ ax: 30, ay: -1, bx: 30, by: 1 },
			{ ax: -40, ay: -9, bx: 80, by: -9 }
		]);
		expect(long.isBlocked(-20, 0, 70, 0.2)).toBe(true);
		expect(long.isBlocked(-20, 2, 70, 2)).toBe(false);
	});

	it('measures the distance to the nearest wall, and calls far ones far', () => {
		expect(walls.distance(0.3, 2)).toBeCloseTo(0.3, 12);
		expect(walls.distance(0, 4.5)).toBeCloseTo(0.5, 12);
		expect(walls.distance(0, 9)).toBe(Infinity);
	});
});

describe('distance fields and routes', () => {
	const goal = { x: 27, y: 6 };
	const field = computeDistanceField(grid, [goal]);

	it('is the straight distance on open floor, within 8 % (first-order scheme on a 0.5 m grid)', () => {
		for (const [x, y] of [
			[20, 6],
			[22, 9],
			[24, 3]
		] as const) {
			const straight = Math.hypot(x - goal.x, y - goal.y);
			expect(distanceAt(grid, field, x, y) / straight).toBeGreaterThan(0.92);
			expect(distanceAt(grid, field, x, y) / straight).toBeLessThan(1.08);
		}
	});

	it('leads through the door and never through a wall', () => {
		const route = findRoute(grid, field, { x: 3, y: 10 }, goal)!;
		expect(route[0]).toEqual({ x: 3, y: 10 });
		expect(route.at(-1)).toEqual(goal);
		for (let i = 1; i < route.length; i++) {
			const [a, b] = [route[i - 1]!, route[i]!];
			expect(grid.walls.isBlocked(a.x, a.y, b.x, b.y)).toBe(false);
		}
		const atWall = route.findIndex(({ x }) => x > 15);
		const [a, b] = [route[atWall - 1]!, route[atWall]!];
		const y = a.y + ((15 - a.x) / (b.x - a.x)) * (b.y - a.y);
		expect(y).toBeGreaterThan(4.3);
		expect(y).toBeLessThan(6.7);
	});

	it('does not share its first point with the walker it was asked for', () => {
		const walker = { x: 3, y: 10 };
		const route = findRoute(grid, field, walker, goal)!;
		walker.x = 99;
		expect(route[0]!.x).toBe(3);
	});

	it('says null where there is no way', () => {
		const closed = createNavGrid({ ...SMALL_FLOOR, walls: [{ ax: 15, ay: 0, bx: 15, by: 12 }] }, 0.4);
		expect(findRoute(closed, computeDistanceField(closed, [goal]), { x: 3, y: 3 }, goal)).toBeNull();
	});

	it('finds the free floor next to a point inside a pillar', () => {
		const free = nearestFree(grid, 9, 8.5)!;
		expect(Math.hypot(free.x - 9, free.y - 8.5)).toBeLessThan(1.5);
		expect(grid.free[grid.index(free.x, free.y)]).toBe(1);
	});
});
