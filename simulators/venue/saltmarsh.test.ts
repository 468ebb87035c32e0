import { describe, expect, it } from 'vitest';
import { Key } from '../../src/lib/contracts/mqtt.ts';
import { computeArea, computePolygonArea } from '../../src/lib/domain/geometry/polygon.ts';
import { intersect } from '../../src/lib/domain/geometry/clipping.ts';
import { SCHEME_NAMES } from '../../src/lib/domain/density/level-of-service.ts';
import { computeDistanceField, createNavGrid, distanceAt, nearestFree } from '../core/nav-grid.ts';
import { fleetOf, SALTMARSH } from './saltmarsh.ts';

describe.each(SALTMARSH.floors)('$floor.name', ({ floor, places, goals, docks, doors, lift }) => {
	it('has zones that lie on the floor, tile nothing twice and use known schemes', () => {
		expect(floor.zones.length).toBeGreaterThanOrEqual(8);
		expect(floor.zones.filter((zone) => zone.private)).toHaveLength(1);
		for (const zone of floor.zones) {
			expect(SCHEME_NAMES).toContain(zone.scheme);
			expect(computeArea(intersect([zone.polygon], [floor.walkable]))).toBeGreaterThan(
				0.5 * computePolygonArea(zone.polygon)
			);
			for (const other of floor.zones) {
				if (other !== zone) expect(computeArea(intersect([zone.polygon], [other.polygon]))).toBeLessThan(1e-6);
			}
		}
	});

	it('covers almost all of the floor with zones', () => {
		const zoned = floor.zones.reduce((sum, zone) => sum + computeArea(intersect([zone.polygon], [floor.walkable])), 0);
		expect(zoned / computePolygonArea(floor.walkable)).toBeGreaterThan(0.95);
	});

	it('lets a robot drive from its dock to every goal', () => {
		const grid = createNavGrid(floor, 0.55);
		for (const goal of [...goals, ...docks, ...doors, ...(lift ? [lift] : [])]) {
			expect(nearestFree(grid, goal.x, goal.y)).not.toBeNull();
			const field = computeDistanceField(grid, [goal]);
			expect({ goal: goal.key, reached: distanceAt(grid, field, docks[0]!.x, docks[0]!.y) < 400 }).toEqual({
				goal: goal.key,
				reached: true
			});
		}
	});

	it('lets people walk to every place', () => {
		const grid = createNavGrid(floor, 0.25);
		const door = places.find(({ kind }) => kind === 'entrance')!;
		const field = computeDistanceField(grid, [{ x: (door.minX + door.maxX) / 2, y: (door.minY + door.maxY) / 2 }]);
		for (const { minX, maxX, minY, maxY } of places) {
			const free = nearestFree(grid, (minX + maxX) / 2, (minY + maxY) / 2)!;
			expect(distanceAt(grid, field, free.x, free.y)).toBeLessThan(400);
		}
	});

	it('has maps that differ from the drawing', () => {
		for (const { rotation, scale, tx, ty } of Object.values(floor.maps)) {
			expect(scale).toBe(1);
			expect(Math.abs(rotation)).toBeGreaterThan(0.1);
			expect(Math.hypot(tx, ty)).toBeGreaterThan(1);
		}
	});
});

describe('the fleet', () => {
	it('is 24 robots of three models with keys a topic can hold and marks of their own', () => {
		const fleet = fleetOf();
		expect(fleet).toHaveLength(24);
		expect(new Set(fleet.map(({ model }) => model.key)).size).toBe(3);
		expect(new Set(fleet.map(({ mark }) => mark)).size).toBe(24);
		for (const { key } of fleet) expect(Key.safeParse(key).success).toBe(true);
		for (const { maps, floor } of fleet)
			expect(Object.keys(SALTMARSH.floors[floor]!.floor.maps)).toContain(maps[floor]);
	});

	it('grows for load tests without changing the first 24', () => {
		const large = fleetOf(200);
		expect(large.slice(0, 24)).toEqual(fleetOf());
		expect(new Set(large.map(({ key }) => key)).size).toBe(200);
	});
});
