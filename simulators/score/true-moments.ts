/** What truly surrounded a robot a moment ago: everybody with place, motion and willingness, kept for half a minute. */

import type { Point } from '../../src/lib/domain/geometry/types.ts';
import { directionAlong } from '../../src/lib/domain/engine/way.ts';
import type { FloorModel } from '../../src/lib/domain/engine/floor-model.ts';
import type { EngineRules } from '../../src/lib/domain/engine/rules.ts';
import { computeRooms, computeVerdict, type RoomPerson, type Verdict } from '../../src/lib/domain/room/room.ts';
import type { FloorWorld } from '../core/floor-world.ts';
import { FOLLOWING } from '../crowd/population.ts';
import type { Agent } from '../robots/agent.ts';
import type { World } from '../world.ts';

/** s between two pictures, and s they are kept: a halt is noted some seconds after it began. */
const EVERY_S = 0.2;
const KEPT_S = 30;
/** m/s at which somebody who makes way steps aside in the simulation; everybody else stays. */
const STEP_ASIDE = 0.6;
/** m along the route that give the way ahead, as the desk takes it */
const LOOK_AHEAD_M = 1.5;
/** m/s; nobody in the simulation walks faster */
const WALKING_MOST = 2;

interface RobotThen {
	readonly x: number;
	readonly y: number;
	readonly floor: number;
	readonly route: readonly Point[] | null;
	readonly goal: Point | null;
}

interface Picture {
	readonly time: number;
	readonly robots: ReadonlyMap<string, RobotThen>;
	readonly people: readonly (readonly RoomPerson[])[];
}

interface TrueMoment {
	readonly alone: number;
	readonly shared: number;
	readonly verdict: Verdict;
	/** m from centre to centre; null when nobody is on the floor */
	readonly nearestPerson: number | null;
}

export class TrueMoments {
	readonly #pictures: Picture[] = [];

	constructor(
		readonly world: World,
		readonly models: readonly FloorModel[],
		readonly rules: EngineRules
	) {}

	/** Keeps the present; call after every step of the world. */
	step(): void {
		const { world } = this;
		const last = this.#pictures.at(-1);
		if (last && world.time - last.time < EVERY_S - 1e-6) return;
		this.#pictures.push({
			time: world.time,
			robots: new Map(world.agents.map((agent) => [agent.vehicle.robot.key, robotNow(agent)])),
			people: world.floors.map((floor) => peopleNow(floor, this.rules.room.personRadiusM))
		});
		if (world.time - this.#pictures[0]!.time > KEPT_S) this.#pictures.shift();
	}

	/** Room and verdict as they were at `time`; null without a picture within a second, or without a task then. */
	at(robot: string, time: number): TrueMoment | null {
		let picture: Picture | null = null;
		for (const candidate of this.#pictures) {
			if (!picture || Math.abs(candidate.time - time) < Math.abs(picture.time - time)) picture = candidate;
		}
		const then = picture?.robots.get(robot);
		if (!picture || !then?.goal || Math.abs(picture.time - time) > 1) return null;
		const { x, y, floor, route, goal } = then;
		const direction = directionAlong(route, goal, x, y, LOOK_AHEAD_M);
		const model = this.world.agent(robot)?.vehicle.robot.model;
		if (direction === null || !model) return null;
		const { horizonS, sectorRad } = this.rules.room;
		const reach = model.maxSpeed * horizonS;
		const all = picture.people[floor]!;
		const away = (person: Point) => Math.hypot(person.x - x, person.y - y);
		const { alone, shared } = computeRooms({
			x,
			y,
			radius: model.radius,
			maxSpeed: model.maxSpeed,
			direction,
			horizon: horizonS,
			sector: sectorRad,
			persons: all.filter((person) => away(person) <= reach + WALKING_MOST * horizonS),
			walls: this.models[floor]!.solid.near(x, y, reach + model.radius)
		});
		const { goSpeed } = this.rules.halt;
		const verdict = computeVerdict({ alone, shared, goSpeed, observedShare: 1, leastObserved: 0 });
		const nearest = all.reduce((least, person) => Math.min(least, away(person)), Infinity);
		return { alone, shared, verdict, nearestPerson: nearest === Infinity ? null : nearest };
	}
}

function robotNow({ vehicle }: Agent): RobotThen {
	const { x, y, floor, task } = vehicle;
	return { x, y, floor, route: task?.route ?? null, goal: task?.goal ?? null };
}

function peopleNow({ people }: FloorWorld, radius: number): RoomPerson[] {
	const all: RoomPerson[] = [];
	for (let i = 0; i < people.end; i++) {
		if (!people.alive[i]) continue;
		const yields = people.yields[i] === 1 && people.mode[i] !== FOLLOWING;
		all.push({
			x: people.x[i]!,
			y: people.y[i]!,
			vx: people.vx[i]!,
			vy: people.vy[i]!,
			radius,
			flexibility: yields ? STEP_ASIDE : 0
		});
	}
	return all;
}
