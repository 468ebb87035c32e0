import { describe, expect, it } from 'vitest';
import fc from 'fast-check';
import { computeHallZone, HALL_RADII } from './proxemics.ts';
import { computeEncounters, computeIntrusion, computeSeparation } from './separation.ts';
import { computeTimeToCollision } from './time-to-collision.ts';

const RADII = { robot: 0.3, person: 0.25 };
const path = (...rows: [time: number, x: number, y: number][]) => rows.map(([time, x, y]) => ({ time, x, y }));
const along = path([0, 0, 0], [10, 10, 0]);

describe('separation', () => {
	it('trap: sampled minima miss the encounter: 0.8 m apart, 5.06 m at the samples', () => {
		const found = computeSeparation(along, path([0, 5, 0.8], [10, 5, 0.8]), RADII);
		expect(found.centre).toBeCloseTo(0.8, 12);
		expect(found.at).toBeCloseTo(5, 9);
		expect(found.sampledCentre).toBeCloseTo(5.06, 2);
	});

	it('interpolates both movers', () => {
		const crossing = computeSeparation(along, path([0, 5, -6], [10, 5, 4]), RADII);
		expect(crossing.centre).toBeCloseTo(Math.SQRT1_2, 9);
	});

	// Common practice: the closest approach of two people in one open outdoor recording is quoted as 0.21 m; the figure
	// changes with the time grid it is taken on.
	it('a closest approach depends on the time grid, so the result names its grid and that it interpolates', () => {
		const walker = (step: number, side: number) =>
			path(
				...Array.from({ length: Math.round(4.8 / step) + 1 }, (_, i): [number, number, number] => {
					const t = i * step;
					return [t, side * (1.3 * t - 2.86), side * (0.105 + 0.4 * (t - 2.2) ** 2)];
				})
			);
		const fine = computeSeparation(walker(0.1, 1), walker(0.1, -1), RADII);
		const coarse = computeSeparation(walker(1.2, 1), walker(1.2, -1), RADII);
		expect(fine.centre).toBeCloseTo(0.21, 2);
		expect(Math.abs(coarse.centre - fine.centre)).toBeGreaterThan(0.05);
		expect(fine).toMatchObject({ interpolated: true, grid: { samples: 49 } });
		expect(fine.grid.longestStep).toBeCloseTo(0.1, 9);
		expect(coarse.grid.longestStep).toBeCloseTo(1.2, 9);
	});

	it('is Infinity, and nothing sampled, when the two were never there at the same time', () => {
		expect(computeSeparation(along, path([20, 5, 0], [30, 5, 0]), RADII)).toEqual({
			centre: Infinity,
			surface: Infinity,
			sampledCentre: null,
			at: null,
			interpolated: true,
			grid: { samples: 0, longestStep: null }
		});
	});

	it('never exceeds the sampled minimum, and is the same seen from either side', () => {
		const coordinate = fc.double({ min: -5, max: 5, noNaN: true });
		const rows = fc.array(fc.tuple(coordinate, coordinate), { minLength: 2, maxLength: 8 });
		fc.assert(
			fc.property(rows, rows, (a, b) => {
				const robot = a.map(([x, y], i) => ({ time: i, x, y }));
				const person = b.map(([x, y], i) => ({ time: i * 0.7, x, y }));
				const found = computeSeparation(robot, person, RADII);
				if (found.sampledCentre !== null) expect(found.centre).toBeLessThanOrEqual(found.sampledCentre + 1e-9);
				expect(computeSeparation(person, robot, RADII).centre).toBeCloseTo(found.centre, 9);
			})
		);
	});
});

describe('intrusion', () => {
	const left = path([0, 4, 0.9], [10, 4, 0.9]);
	const right = path([0, 5, -0.9], [10, 5, -0.9]);

	it('trap: two people near at once: time is not person-seconds; centre is not surface distance', () => {
		const found = computeIntrusion(along, [left, right], 1.2, 0.05);
		expect(found.time).toBeCloseTo(2.59, 2);
		expect(found.personSeconds).toBeCloseTo(3.17, 2);
		const { centre, surface } = computeSeparation(along, left, RADII);
		expect(centre - surface).toBeCloseTo(0.55, 12);
	});

	it('trap: a person who walks up to a standing robot is no intrusion by the robot', () => {
		const standing = path([0, 0, 0], [10, 0, 0]);
		const visitor = path([0, 5, 0], [10, 0.5, 0]);
		const found = computeIntrusion(standing, [visitor], 1.2, 0.05);
		expect(found.time).toBeGreaterThan(1);
		expect(found.movingTime).toBe(0);
		expect(computeIntrusion(visitor, [standing], 1.2, 0.05).movingTime).toBeCloseTo(found.time, 9);
	});

	it('is strict: exactly on the radius is outside', () => {
		expect(computeIntrusion(along, [path([0, 0, 1.2], [10, 10, 1.2])], 1.2, 0.05).time).toBe(0);
	});
});

describe('encounters', () => {
	const options = { robotRadius: 0.3, personRadius: 0.25, spaceThreshold: 0.5, movingSpeed: 0.05 };

	it('measures nothing without people, rather than 0', () => {
		expect(computeEncounters(along, [], options)).toBeNull();
	});

	it('trap: "space compliance" is given both ways round', () => {
		const found = computeEncounters(along, [path([0, 5, 0.3], [10, 5, 0.3])], options)!;
		expect(found.shareBelowThreshold).toBeCloseTo(0.08, 9);
		expect(found.shareAtOrAboveThreshold).toBeCloseTo(0.92, 9);
		expect(found.separation.surface).toBe(0);
		expect(found.leastTimeToCollision).toBeCloseTo(4.539, 3);
	});

	it('has no shares of a path without duration', () => {
		expect(computeEncounters(path([0, 0, 0]), [along], options)).toMatchObject({
			personalShare: null,
			shareBelowThreshold: null
		});
	});
});

describe('time to collision', () => {
	it('is gap over closing speed head-on, 0 in contact even when parting, Infinity on a miss', () => {
		expect(computeTimeToCollision({ x: 4, y: 0 }, { x: -1, y: 0 }, 0.55)).toBeCloseTo(3.45, 12);
		expect(computeTimeToCollision({ x: 0.4, y: 0 }, { x: 1, y: 0 }, 0.55)).toBe(0);
		expect(computeTimeToCollision({ x: 4, y: 0 }, { x: 1, y: 0 }, 0.55)).toBe(Infinity);
		expect(computeTimeToCollision({ x: 4, y: 0.56 }, { x: -1, y: 0 }, 0.55)).toBe(Infinity);
		expect(computeTimeToCollision({ x: 4, y: 0 }, { x: 0, y: 0 }, 0.55)).toBe(Infinity);
	});

	it('brings the discs exactly into contact', () => {
		const angle = fc.double({ min: -Math.PI, max: Math.PI, noNaN: true });
		const aside = fc.double({ min: -0.49, max: 0.49, noNaN: true });
		const distance = fc.double({ min: 0.6, max: 20, noNaN: true });
		const speed = fc.double({ min: 0.05, max: 3, noNaN: true });
		fc.assert(
			fc.property(angle, aside, distance, speed, (heading, off, away, fast) => {
				const [cos, sin] = [Math.cos(heading), Math.sin(heading)];
				const position = { x: -away * cos - off * sin, y: -away * sin + off * cos };
				const time = computeTimeToCollision(position, { x: fast * cos, y: fast * sin }, 0.5);
				expect(time).toBeGreaterThan(0);
				expect(Math.hypot(position.x + fast * cos * time, position.y + fast * sin * time)).toBeCloseTo(0.5, 6);
			})
		);
	});
});

describe('Hall zones (Hall 1966, The Hidden Dimension)', () => {
	it('are 18 in, 48 in and 12 ft; papers on robots round them to 0.45, 1.2 and 3.6 m', () => {
		expect(HALL_RADII.inches.intimate).toBeCloseTo(0.4572, 12);
		expect(HALL_RADII.inches.personal).toBeCloseTo(1.2192, 12);
		expect(HALL_RADII.inches.social).toBeCloseTo(3.6576, 12);
	});

	it('put a distance on a bound into the outer zone, and differ between the schemes', () => {
		expect(computeHallZone(0.45, 'rounded')).toBe('personal');
		expect(computeHallZone(0.45, 'inches')).toBe('intimate');
		expect(computeHallZone(1.2192, 'inches')).toBe('social');
		expect(computeHallZone(9, 'rounded')).toBe('public');
		expect(computeHallZone(NaN, 'rounded')).toBeNull();
	});
});
