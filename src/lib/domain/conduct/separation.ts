/** How near did the robot come to people, and for how long? */

import { HALL_RADII } from './proxemics.ts';
import {
	computeClosest,
	computeNearerThan,
	computeUnionLength,
	pairStretches,
	positionAt,
	type TimedPoint
} from './movement.ts';
import { computeTimeToCollision } from './time-to-collision.ts';

/**
 * Least distance between two movers. Closest approaches depend on the time grid, so the result says which one it rests on
 * and whether it was interpolated; figures of different grids must not be compared.
 */
export interface Separation {
	/** m, centre to centre, between samples too; Infinity when they were never there at the same time */
	readonly centre: number;
	/** m, outline to outline, at least 0 */
	readonly surface: number;
	/** m, centre to centre at the first mover's sample times only; null without one. Never less than `centre`. */
	readonly sampledCentre: number | null;
	/** s, when `centre` was reached; null when never together */
	readonly at: number | null;
	/** Whether `centre` was taken between samples. Always true here; print it with the number. */
	readonly interpolated: true;
	/** Sample times of either mover while both were there, and the longest step between them in s */
	readonly grid: { readonly samples: number; readonly longestStep: number | null };
}

/** Separation of two paths. Continuous minimum: Francis et al. 2023, Principles and guidelines for evaluating social robot navigation algorithms. */
export function computeSeparation(
	robot: readonly TimedPoint[],
	person: readonly TimedPoint[],
	radii: { readonly robot: number; readonly person: number }
): Separation {
	const stretches = pairStretches(robot, person);
	let centre = Infinity;
	let at: number | null = null;
	let longestStep: number | null = null;
	for (const { from, to, start, end } of stretches) {
		const { distance, share } = computeClosest(start, end);
		if (distance < centre) {
			centre = distance;
			at = from + share * (to - from);
		}
		longestStep = Math.max(longestStep ?? 0, to - from);
	}
	const samples = stretches.length === 0 ? 0 : stretches.length + 1;
	return {
		centre,
		surface: Math.max(0, centre - radii.robot - radii.person),
		sampledCentre: sampledSeparation(robot, person),
		at,
		interpolated: true,
		grid: { samples, longestStep }
	};
}

function sampledSeparation(robot: readonly TimedPoint[], person: readonly TimedPoint[]): number | null {
	const [first, last] = [person[0], person[person.length - 1]];
	if (!first || !last) return null;
	let least: number | null = null;
	for (const { time, x, y } of robot) {
		if (time < first.time || time > last.time) continue;
		const other = positionAt(person, time);
		least = Math.min(least ?? Infinity, Math.hypot(other.x - x, other.y - y));
	}
	return least;
}

/** Time people were nearer than a radius. */
export interface Intrusion {
	/** s with anybody within; people near at once count once */
	readonly time: number;
	/** person·s, people counted separately */
	readonly personSeconds: number;
	/** s of `time` while the robot moved: a person who walks up to a standing robot is no intrusion by the robot */
	readonly movingTime: number;
}

/**
 * Time with a person nearer (centre distance, strictly) than `radius` m.
 *
 * @param movingSpeed m/s from which the robot counts as moving
 */
export function computeIntrusion(
	robot: readonly TimedPoint[],
	people: readonly (readonly TimedPoint[])[],
	radius: number,
	movingSpeed: number
): Intrusion {
	const intervals: [from: number, to: number][] = [];
	const moving: [from: number, to: number][] = [];
	let personSeconds = 0;
	for (const { from, to, start, end } of people.flatMap((person) => pairStretches(robot, person))) {
		const near = computeNearerThan(start, end, radius);
		if (!near) continue;
		const interval: [number, number] = [from + near[0] * (to - from), from + near[1] * (to - from)];
		intervals.push(interval);
		personSeconds += (near[1] - near[0]) * (to - from);
		const a = positionAt(robot, from);
		const b = positionAt(robot, to);
		if (Math.hypot(b.x - a.x, b.y - a.y) >= movingSpeed * (to - from)) moving.push(interval);
	}
	return { time: computeUnionLength(intervals), personSeconds, movingTime: computeUnionLength(moving) };
}

export interface EncounterMetrics {
	/** Over all people; see `Separation` */
	readonly separation: Separation;
	/** By the rounded radii of Hall's zones */
	readonly within: { readonly [zone in 'intimate' | 'personal' | 'social']: Intrusion };
	/** Share of the robot's time with somebody in personal space; null for a path without duration */
	readonly personalShare: number | null;
	/**
	 * Share of the robot's time with the nearest person below `spaceThreshold`, and the rest. Published as "space compliance",
	 * a name that suggests the second and is defined as the first (Francis et al. 2023): print which one it is.
	 */
	readonly shareBelowThreshold: number | null;
	readonly shareAtOrAboveThreshold: number | null;
	/** s, least over the starts of all stretches at that stretch's velocities; Infinity when never on a collision course */
	readonly leastTimeToCollision: number;
}

/** Metrics of one robot's path among people; null without people, as nothing was measured then. */
export function computeEncounters(
	robot: readonly TimedPoint[],
	people: readonly (readonly TimedPoint[])[],
	options: {
		readonly robotRadius: number;
		readonly personRadius: number;
		/** m, centre distance; 0.5 in the literature */
		readonly spaceThreshold: number;
		/** m/s */
		readonly movingSpeed: number;
	}
): EncounterMetrics | null {
	if (people.length === 0) return null;
	const { robotRadius, personRadius, movingSpeed } = options;
	const each = people.map((person) => computeSeparation(robot, person, { robot: robotRadius, person: personRadius }));
	const intrusion = (radius: number) => computeIntrusion(robot, people, radius, movingSpeed);
	const { intimate, personal, social } = HALL_RADII.rounded;
	const within = { intimate: intrusion(intimate), personal: intrusion(personal), social: intrusion(social) };
	const duration = robot.length > 1 ? robot[robot.length - 1]!.time - robot[0]!.time : 0;
	const share = (time: number) => (duration > 0 ? time / duration : null);
	const below = share(intrusion(options.spaceThreshold).time);
	return {
		separation: nearestOf(each),
		within,
		personalShare: share(within.personal.time),
		shareBelowThreshold: below,
		shareAtOrAboveThreshold: below === null ? null : 1 - below,
		leastTimeToCollision: leastTimeToCollision(robot, people, robotRadius + personRadius)
	};
}

function nearestOf(separations: readonly Separation[]): Separation {
	const nearest = separations.reduce((a, b) => (b.centre < a.centre ? b : a));
	const sampled = separations.flatMap(({ sampledCentre }) => sampledCentre ?? []);
	return { ...nearest, sampledCentre: sampled.length > 0 ? Math.min(...sampled) : null };
}

function leastTimeToCollision(
	robot: readonly TimedPoint[],
	people: readonly (readonly TimedPoint[])[],
	reach: number
): number {
	let least = Infinity;
	for (const { from, to, start, end } of people.flatMap((person) => pairStretches(robot, person))) {
		const velocity = { x: (end.x - start.x) / (to - from), y: (end.y - start.y) / (to - from) };
		least = Math.min(least, computeTimeToCollision(start, velocity, reach));
	}
	return least;
}
