import { describe, expect, it, vi } from 'vitest';
import { speedOfDensity as weidmannSpeed } from '../../src/lib/domain/density/fundamental-diagram.ts';
import { measureCorridor } from './corridor.ts';
import { createNavGrid, isInsideRing } from '../core/nav-grid.ts';
import { createRandom } from '../core/random.ts';
import { SMALL_FLOOR } from '../../tests/support/fleet-venue.ts';
import { Population, WALKING } from './population.ts';
import { Walking } from './walking.ts';

// Whole runs, on a machine that may be busy.
vi.setConfig({ testTimeout: 60_000 });

describe('speed and density in a corridor', () => {
	// Weidmann 1993 (METHODS: 1.34, 1.913, 5.4). Band chosen by us: his own data scatter by more than ±0.15 m/s.
	it.each([40, 120, 200, 280])('walks within 0.12 m/s of Weidmann with %i people on 160 m²', (persons) => {
		const { density, speed } = measureCorridor(persons, 15, 1);
		expect(density).toBeGreaterThan(0.2);
		expect(Math.abs(speed - weidmannSpeed(density))).toBeLessThan(0.12);
	});

	it('keeps people from standing in each other: below 0.5 % are nearer than 0.3 m at 1.5 persons/m²', () => {
		expect(measureCorridor(240, 15, 2).tooClose).toBeLessThan(0.005);
	});

	it('lets nobody through the side walls', () => {
		expect(measureCorridor(320, 10, 3).outside).toBe(0);
	});

	it('gives the same walk for the same seed', () => {
		expect(measureCorridor(60, 5, 4)).toEqual(measureCorridor(60, 5, 4));
		expect(measureCorridor(60, 5, 4)).not.toEqual(measureCorridor(60, 5, 5));
	});
});

describe('walls', () => {
	it('are never crossed by people who push towards a goal on the other side', () => {
		const grid = createNavGrid(SMALL_FLOOR, 0.2);
		const random = createRandom(9);
		const people = new Population(grid.walls.bounds, 80);
		const walking = new Walking(people, grid, random);
		for (let i = 0; i < 80; i++) {
			const spot = { x: random.between(10, 14), y: random.between(8, 11.5) };
			const slot = people.add({ ...spot, speed: 1.5, radius: 0.2, yields: true, group: 0 });
			people.mode[slot] = WALKING;
			// Straight through the inner wall: no distance field tells them about the door.
			people.goalX[slot] = 25;
			people.goalY[slot] = 10;
		}
		for (let step = 0; step < 300; step++) {
			const before = Array.from({ length: 80 }, (_, i) => [people.x[i]!, people.y[i]!] as const);
			walking.step(0.1, []);
			for (const [i, [x, y]] of before.entries()) {
				expect(grid.walls.isBlocked(x, y, people.x[i]!, people.y[i]!)).toBe(false);
			}
		}
		for (let i = 0; i < 80; i++) {
			expect(isInsideRing(SMALL_FLOOR.walkable.outer, people.x[i]!, people.y[i]!)).toBe(true);
			expect(isInsideRing(SMALL_FLOOR.walkable.holes[0]!, people.x[i]!, people.y[i]!)).toBe(false);
		}
	});
});
