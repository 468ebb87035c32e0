/** A venue, as a fold over its floors: finds out by its map which floor a robot is on and takes it along when that changes. */

import type { Robot } from '../floor.ts';
import type { EngineEvent } from './events.ts';
import { createFloorState, stepFloor, type FloorContext, type FloorState } from './floor-engine.ts';
import { createFloorModel, type FloorModel } from './floor-model.ts';
import type { Floor } from '../floor.ts';
import type { Frame } from './frame.ts';
import { withTask } from './hear.ts';
import type { ConnectionObservation, Observation, RobotObservation, StateObservation } from './observation.ts';
import { startRobotView, type OpenHalt, type RobotView } from './robot-view.ts';
import type { EngineRules } from './rules.ts';

export interface VenueContext {
	readonly venue: string;
	readonly floors: ReadonlyMap<string, FloorContext>;
	/** Robot map → floor key */
	readonly floorOfMap: ReadonlyMap<string, string>;
	readonly robots: ReadonlyMap<string, Robot>;
}

/** Last words of a robot that has not yet said where it is. */
interface Waiting {
	readonly state: StateObservation | null;
	readonly connection: ConnectionObservation | null;
}

export interface VenueState {
	readonly floors: ReadonlyMap<string, FloorState>;
	/** Robot key → floor key */
	readonly floorOfRobot: ReadonlyMap<string, string>;
	readonly waiting: ReadonlyMap<string, Waiting>;
}

export interface VenueStep {
	readonly state: VenueState;
	readonly frames: readonly Frame[];
	readonly events: readonly EngineEvent[];
}

export function createVenueContext(
	venue: string,
	floors: readonly Floor[],
	robots: readonly Robot[],
	rules: EngineRules,
	cell?: number
): VenueContext {
	const byKey = new Map(robots.map((robot) => [robot.key, robot]));
	const floorOfMap = new Map<string, string>();
	const contexts = new Map<string, FloorContext>();
	for (const floor of floors) {
		const model: FloorModel = createFloorModel(floor, cell);
		contexts.set(floor.key, { venue, model, rules, robots: byKey });
		for (const map of Object.keys(floor.maps)) floorOfMap.set(map, floor.key);
	}
	return { venue, floors: contexts, floorOfMap, robots: byKey };
}

/** @param openHalts halts left open by an earlier run, by floor key */
export function createVenueState(
	{ floors }: VenueContext,
	openHalts: ReadonlyMap<string, readonly OpenHalt[]> = new Map()
): VenueState {
	const states = new Map<string, FloorState>();
	const floorOfRobot = new Map<string, string>();
	for (const [key, context] of floors) {
		const state = createFloorState(context, openHalts.get(key) ?? []);
		states.set(key, state);
		for (const robot of state.robots.keys()) floorOfRobot.set(robot, key);
	}
	return { floors: states, floorOfRobot, waiting: new Map() };
}

/** All floors of the venue after some more observations, at `now` in s. */
export function stepVenue(
	context: VenueContext,
	state: VenueState,
	observations: readonly Observation[],
	now: number
): VenueStep {
	const routed = route(context, state, observations);
	const floors = new Map<string, FloorState>();
	const frames: Frame[] = [];
	const events: EngineEvent[] = routed.events;
	for (const [key, floorContext] of context.floors) {
		const step = stepFloor(floorContext, routed.floors.get(key)!, routed.perFloor.get(key) ?? [], now);
		floors.set(key, step.state);
		frames.push(step.frame);
		events.push(...step.events);
	}
	return { state: { floors, floorOfRobot: routed.floorOfRobot, waiting: routed.waiting }, frames, events };
}

function route(context: VenueContext, state: VenueState, observations: readonly Observation[]) {
	const floors = new Map(state.floors);
	const floorOfRobot = new Map(state.floorOfRobot);
	const waiting = new Map(state.waiting);
	const perFloor = new Map<string, Observation[]>([...context.floors.keys()].map((key) => [key, []]));
	const events: EngineEvent[] = [];
	for (const observation of observations) {
		if (observation.kind === 'listening') {
			for (const list of perFloor.values()) list.push(observation);
			continue;
		}
		const { robot } = observation;
		const current = floorOfRobot.get(robot);
		const target = observation.kind === 'pose' ? context.floorOfMap.get(observation.map) : current;
		if (target === undefined) {
			if (observation.kind === 'pose') events.push(unknownMap(observation, observation.map));
			else if (observation.kind !== 'people')
				waiting.set(robot, { ...waitingOf(waiting, robot), ...lastWord(observation) });
			continue;
		}
		if (target !== current) {
			if (current !== undefined) moveRobot(context, floors, robot, current, target);
			const { state: said, connection } = waitingOf(waiting, robot);
			if (connection) perFloor.get(target)!.push(connection);
			if (said) perFloor.get(target)!.push(said);
			waiting.delete(robot);
			floorOfRobot.set(robot, target);
		}
		perFloor.get(target)!.push(observation);
	}
	return { floors, floorOfRobot, waiting, perFloor, events };
}

const waitingOf = (waiting: ReadonlyMap<string, Waiting>, robot: string): Waiting =>
	waiting.get(robot) ?? { state: null, connection: null };

const lastWord = (said: StateObservation | ConnectionObservation): Partial<Waiting> =>
	said.kind === 'state' ? { state: said } : { connection: said };

const unknownMap = (said: RobotObservation, map: string): EngineEvent => ({
	type: 'rejected',
	said,
	reason: 'unknown_map',
	detail: `No floor knows the map "${map}".`,
	at: said.receivedAt
});

/** The robot keeps its clock, state and any open halt; its path starts anew because positions of two maps do not join. */
function moveRobot(
	context: VenueContext,
	floors: Map<string, FloorState>,
	robot: string,
	from: string,
	to: string
): void {
	const left = floors.get(from)!;
	const entered = floors.get(to)!;
	const leaving = new Map(left.robots);
	const view = leaving.get(robot);
	leaving.delete(robot);
	floors.set(from, { ...left, robots: leaving });
	const known = context.robots.get(robot);
	if (!known) return;
	const arrived: RobotView = { ...(view ?? startRobotView(known)), poses: [], map: null, moments: [], task: null };
	const { model } = context.floors.get(to)!;
	floors.set(to, { ...entered, robots: new Map(entered.robots).set(robot, withTask(model, arrived)) });
}
