/** What surrounds one robot now: density, persons near, room alone and shared, and how much of it was seen. */

import { directionAlong } from './way.ts';
import { computeRoom, computeRooms, computeVerdict, type RoomPerson } from '../room/room.ts';
import type { FloorModel } from './floor-model.ts';
import { computeLocalDensity, computeObservedShare } from './local-density.ts';
import type { PersonPoint } from './frame.ts';
import { latestPose, type Moment, type RobotView } from './robot-view.ts';
import type { EngineRules } from './rules.ts';

/** m along the route: far enough to look past the robot's own footprint, near enough to follow a corner. */
const LOOK_AHEAD_M = 1.5;

export interface Surroundings {
	readonly persons: readonly PersonPoint[];
	/** 2n, x then y, of `persons` */
	readonly places: Float64Array;
	/** 2n, x then y, of the persons on observed floor */
	readonly points: Float64Array;
	readonly observed: Uint8Array;
	/** m/s, what people here give way by */
	readonly flexibility: number;
}

/** Null before the first pose. */
export function lookAround(
	model: FloorModel,
	rules: EngineRules,
	view: RobotView,
	{ persons, places, points, observed, flexibility }: Surroundings,
	now: number
): Moment | null {
	const pose = latestPose(view);
	if (!pose) return null;
	const { density: densityRule, room: roomRule, halt: haltRule } = rules;
	const { x, y } = pose;
	const { radius, maxSpeed } = view.robot.model;
	const local = computeLocalDensity(
		model,
		observed,
		points,
		x,
		y,
		densityRule.aroundRadiusM,
		densityRule.leastCoverage
	);
	const reach = maxSpeed * roomRule.horizonS;
	const observedShare = computeObservedShare(model, observed, x, y, reach);
	const limit = reach + PERSON_SPEED * roomRule.horizonS;
	const near: RoomPerson[] = [];
	let within2m = 0;
	let nearest2 = Infinity;
	for (let i = 0; i < persons.length; i++) {
		const dx = places[2 * i]! - x;
		const dy = places[2 * i + 1]! - y;
		const distance2 = dx * dx + dy * dy;
		if (distance2 < nearest2) nearest2 = distance2;
		if (distance2 <= 4) within2m += 1;
		if (distance2 <= limit * limit) near.push(roomPerson(persons[i]!, roomRule.personRadiusM, flexibility));
	}
	const base = {
		time: now,
		density: local.density,
		coverage: local.coverage,
		personsWithin2m: within2m,
		nearestPerson: nearest2 === Infinity ? null : Math.sqrt(nearest2),
		observedShare,
		flexibility
	};
	const direction = view.task ? directionAlong(view.task.route, view.task.goal, x, y, LOOK_AHEAD_M) : null;
	if (direction === null) {
		return { ...base, roomAlone: null, roomShared: null, limitedByPeople: null, verdict: 'unseen' };
	}
	const query = {
		x,
		y,
		radius,
		maxSpeed,
		direction,
		horizon: roomRule.horizonS,
		sector: roomRule.sectorRad,
		persons: near,
		walls: model.solid.near(x, y, reach + radius)
	};
	const { alone, shared } = computeRooms(query);
	const blocked = alone < haltRule.goSpeed;
	return {
		...base,
		roomAlone: alone,
		roomShared: shared,
		limitedByPeople: blocked && computeRoom({ ...query, persons: [] }).speed >= haltRule.goSpeed,
		verdict: computeVerdict({
			alone,
			shared,
			goSpeed: haltRule.goSpeed,
			observedShare,
			leastObserved: haltRule.leastObservedShare
		})
	};
}

/** m/s; the fastest a person is expected to come towards a robot, so that who can matter is not left out. */
const PERSON_SPEED = 2;

const roomPerson = ({ x, y, vx, vy }: PersonPoint, radius: number, flexibility: number): RoomPerson => ({
	x,
	y,
	vx,
	vy,
	radius,
	flexibility
});

/** Where the persons are, for `Surroundings`. */
export function placesOf(persons: readonly PersonPoint[]): Float64Array {
	const places = new Float64Array(2 * persons.length);
	persons.forEach(({ x, y }, i) => {
		places[2 * i] = x;
		places[2 * i + 1] = y;
	});
	return places;
}
