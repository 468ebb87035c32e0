import { describe, expect, it } from 'vitest';
import fc from 'fast-check';
import { computeTrip, summariseTrips, type TripOptions } from './trajectory.ts';

const OPTIONS: TripOptions = {
	goal: { x: 10, y: 0 },
	goalRadius: 0.2,
	referenceLength: 10,
	preferredSpeed: 1,
	stallSpeed: 0.05,
	stallMinDuration: 3,
	minStep: 0.02,
	initialHeading: 0
};

const trip = (rows: [time: number, x: number, y: number][], changes: Partial<TripOptions> = {}) =>
	computeTrip(
		rows.map(([time, x, y]) => ({ time, x, y })),
		{ ...OPTIONS, ...changes }
	);

it('measures a straight trip', () => {
	expect(
		trip([
			[0, 0, 0],
			[5, 5, 0],
			[10, 10, 0]
		])
	).toMatchObject({
		pathLength: 10,
		pathLengthRatio: 1,
		success: true,
		timeToGoal: 9.8,
		meanSpeed: 1,
		stalledTime: 0,
		headingChange: 0,
		pathIrregularity: 0
	});
});

it('finds stalls of at least the least duration', () => {
	const found = trip([
		[0, 0, 0],
		[2, 2, 0],
		[6, 2.02, 0],
		[8, 4, 0],
		[9, 4, 0],
		[15, 10, 0]
	]);
	expect(found.stalledTime).toBe(5);
	expect(found.stallEpisodes).toEqual([[2, 6]]);
});

describe('traps', () => {
	it('trap: standing jitter has no heading, signed sums cancel, angles wrap', () => {
		const jitter = trip([
			[0, 0, 0],
			[2, 2, 0],
			[3, 2.01, 0.005],
			[4, 2, -0.006],
			[5, 2.005, 0.004],
			[6, 2, 0],
			[14, 10, 0]
		]);
		expect(jitter.headingChange).toBe(0);
		const zigzag = trip([
			[0, 0, 0],
			[2, 2, 1],
			[4, 4, 0],
			[6, 6, 1],
			[8, 8, 0],
			[10, 10, 0]
		]);
		expect(zigzag.headingChange).toBeCloseTo(3.2455, 4);
		expect(zigzag.signedHeadingChange).toBeCloseTo(-0.4636, 4);
		const wrapped = trip([
			[0, 0, 0],
			[1, -Math.cos(0.1), Math.sin(0.1)],
			[2, -2 * Math.cos(0.1), 0]
		]);
		expect(wrapped.headingChange).toBeCloseTo(0.2, 9);
	});

	it('trap: mean speed is length over time, not the mean of the steps', () => {
		expect(
			trip([
				[0, 0, 0],
				[1, 1, 0],
				[2, 2, 0],
				[3, 3, 0],
				[17, 10, 0]
			]).meanSpeed
		).toBeCloseTo(10 / 17, 9);
	});

	it('trap: unfinished trips have a short path; they are counted, not averaged', () => {
		const gaveUp = trip([
			[0, 0, 0],
			[5, 4, 0],
			[20, 4, 0]
		]);
		expect(gaveUp).toMatchObject({ success: false, pathLengthRatio: 0.4, timeToGoal: null, successByPathLength: 0 });
		const detour = trip([
			[0, 0, 0],
			[6, 6, 0],
			[14, 6, 8],
			[30, 10, 0]
		]);
		expect(summariseTrips([gaveUp, detour])).toMatchObject({
			trips: 2,
			completed: 1,
			meanPathLengthRatio: detour.pathLengthRatio
		});
		expect(summariseTrips([gaveUp]).meanPathLengthRatio).toBeNull();
	});

	it('trap: waiting at a goal, dock or lift or by an operator is not a stall', () => {
		const rows: [number, number, number][] = [
			[0, 0, 0],
			[5, 5, 0],
			[15, 5, 0],
			[20, 10, 0],
			[30, 10, 0]
		];
		expect(trip(rows).stalledTime).toBe(20);
		const planned = trip(rows, { plannedStops: [[5, 15]] });
		expect(planned.stalledTime).toBe(10);
		expect(planned.stallEpisodes).toEqual([[20, 30]]);
	});

	it('trap: two published "path irregularities" are different quantities', () => {
		const bent = trip(
			[
				[0, 0, 0],
				[6, 6, 0],
				[14, 6, 8]
			],
			{ goal: { x: 6, y: 8 } }
		);
		expect(bent.pathIrregularity).toBeCloseTo(0.046, 3);
		expect(bent.meanGoalHeadingError).toBeCloseTo(0.464, 3);
	});
});

it('leaves undefined what a path without movement does not have', () => {
	expect(
		trip(
			[
				[0, 0, 0],
				[10, 0, 0]
			],
			{ goal: { x: 0, y: 0 }, referenceLength: 1 }
		)
	).toMatchObject({
		pathEfficiency: null,
		pathIrregularity: null,
		meanGoalHeadingError: null,
		successByPathLength: 1,
		stalledTime: 10
	});
	for (const rows of [[], [[0, 1, 1]]] as [number, number, number][][]) {
		expect(trip(rows)).toMatchObject({ pathLength: 0, displacement: 0, success: false, meanSpeed: null });
	}
	expect(
		trip(
			[
				[0, 0, 0],
				[1, 1, 0]
			],
			{ referenceLength: 0 }
		).pathLengthRatio
	).toBeNull();
});

it('never has a path shorter than its displacement, nor a signed turn above the absolute one', () => {
	const coordinate = fc.double({ min: -20, max: 20, noNaN: true });
	fc.assert(
		fc.property(fc.array(fc.tuple(coordinate, coordinate), { minLength: 2, maxLength: 20 }), (points) => {
			const found = trip(points.map(([x, y], i) => [i, x, y]));
			expect(found.pathLength).toBeGreaterThanOrEqual(found.displacement - 1e-9);
			expect(Math.abs(found.signedHeadingChange)).toBeLessThanOrEqual(found.headingChange + 1e-9);
			expect(found.successByPathLength).toBeLessThanOrEqual(1);
		})
	);
});
