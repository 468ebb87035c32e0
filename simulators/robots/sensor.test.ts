import { describe, expect, it } from 'vitest';
import { SMALL_FLOOR } from '../../tests/support/fleet-venue.ts';
import { createNavGrid } from '../core/nav-grid.ts';
import { createRandom } from '../core/random.ts';
import { Population } from '../crowd/population.ts';
import { Sensor, type SensorSettings } from './sensor.ts';

const PERFECT: SensorSettings = {
	range: 6,
	fieldOfView: Math.PI,
	noise: 0,
	velocityNoise: 0,
	dropout: 0,
	idSwitch: 0,
	ghosts: 0,
	peopleHide: false
};
const grid = createNavGrid(SMALL_FLOOR, 0.2);

function crowdAt(...spots: [x: number, y: number][]): Population {
	const people = new Population(grid.walls.bounds, 64);
	for (const [x, y] of spots) people.add({ x, y, speed: 1, radius: 0.2, yields: true, group: 0 });
	people.sort();
	return people;
}
/** Looks from (12, 5.5) along +x, unless told otherwise. */
const look = (sensor: Sensor, people: Population, time = 0, [x, y, heading] = [12, 5.5, 0]) =>
	sensor.look(x!, y!, heading!, people, grid, time, 0.2);

describe('Sensor', () => {
	it('sees what is in range, in its field of view and not behind a wall', () => {
		const people = crowdAt([14, 5.5], [9, 5.5], [14, 10], [16, 10], [18.5, 5.5], [16, 5.5]);
		const seen = look(new Sensor(PERFECT, createRandom(1)), people).map(({ x, y }) =>
			[x, y].map((v) => Number(v.toFixed(6)))
		);
		// Behind (9, 5.5), behind the wall (16, 10), out of range (18.5, 5.5); through the door (16, 5.5) is fine.
		expect(seen.sort()).toEqual([
			[14, 10],
			[14, 5.5],
			[16, 5.5]
		]);
	});

	it('lets people hide those behind them only when asked to', () => {
		const people = crowdAt([13, 5.5], [14.5, 5.5]);
		expect(look(new Sensor(PERFECT, createRandom(1)), people)).toHaveLength(2);
		expect(look(new Sensor({ ...PERFECT, peopleHide: true }, createRandom(1)), people)).toHaveLength(1);
	});

	it('keeps an id while it sees somebody and starts anew after a restart', () => {
		const people = crowdAt([13, 5.5]);
		const sensor = new Sensor(PERFECT, createRandom(1));
		expect([0, 0.2, 0.4].map((t) => look(sensor, people, t)[0]!.id)).toEqual(['1', '1', '1']);
		people.add({ x: 13, y: 6, speed: 1, radius: 0.2, yields: true, group: 0 });
		people.sort();
		expect(look(sensor, people, 0.6)).toHaveLength(2);
		sensor.restart();
		expect(new Set(look(sensor, people, 0.8).map(({ id }) => id))).toEqual(new Set(['1', '2']));
	});

	it('switches ids, loses people and sees ghosts at about the rates asked for', () => {
		const people = crowdAt([13, 5.5]);
		const looks = (settings: Partial<SensorSettings>) => {
			const sensor = new Sensor({ ...PERFECT, ...settings }, createRandom(5));
			return Array.from({ length: 3000 }, (_, i) => look(sensor, people, i * 0.2));
		};
		const ids = new Set(looks({ idSwitch: 0.1 }).map(([person]) => person!.id));
		// 600 s at 0.1/s: 60 expected, ± 4 standard deviations of a Poisson number.
		expect(ids.size).toBeGreaterThan(30);
		expect(ids.size).toBeLessThan(92);
		const missing = looks({ dropout: 0.2 }).filter((seen) => seen.length === 0).length / 3000;
		expect(missing).toBeGreaterThan(0.05);
		expect(missing).toBeLessThan(0.35);
		const ghosts = looks({ ghosts: 30 }).filter((seen) => seen.length > 1).length / 3000;
		expect(ghosts).toBeGreaterThan(0.1);
		expect(ghosts).toBeLessThan(0.5);
	});

	it('is as noisy as it says', () => {
		const people = crowdAt([15, 5.5]);
		const sensor = new Sensor({ ...PERFECT, noise: 0.05 }, createRandom(6));
		const errors = Array.from({ length: 2000 }, (_, i) => look(sensor, people, i * 0.2)[0]!.x - 15);
		const sd = Math.sqrt(errors.reduce((sum, e) => sum + e * e, 0) / errors.length);
		// 0.05 m at the robot, 1.75 times that at 3 m.
		expect(sd).toBeGreaterThan(0.0825);
		expect(sd).toBeLessThan(0.0925);
	});
});
