/** A venue, as a fold over its floors: finds out by its map which floor a robot is on and takes it along when that changes. */

import type { Robot } from '../floor.ts';
import type { EngineEvent } from './events.ts';
import { createFloorState, stepFloor, type FloorContext, type FloorState } from './floor-engine.ts';
import { createFloorModel, type FloorModel } from './floor-model.ts';
import type { Floor } from '../floor.ts';
import type { Frame } from './frame.ts';
import { withTask } from './hear.ts';
import type { ConnectionObservation, Observation, RobotObservation, StateObservation } from './observation.ts';
import { currentFlexibility, startFlexibility, type Flexibility } from '../room/flexibility.ts';
import { startRobotView, type OpenHalt, type RobotView } from './robot-view.ts';
import type { EngineRules } from './rules.ts';

export interface VenueContext {
	readonly venue: string;
	readonly rules: EngineRules;
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
	/** How people of the venue give way, and when that was last worked out, s */
	readonly learned: { readonly flexibility: Flexibility; readonly at: number };
}

/** s between two workings out: what people do does not change faster. */
const LEARN_EVERY_S = 5;

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
	return { venue, rules, floors: contexts, floorOfMap, robots: byKey };
}

/** What an earlier run left behind, by floor key. */
export interface Remembered {
	readonly openHalts?: ReadonlyMap<string, readonly OpenHalt[]>;
	/** Residuals of the flexibility, m/s */
	readonly residuals?: ReadonlyMap<string, readonly number[]>;
}

export function createVenueState(
	{ floors, rules }: VenueContext,
	{ openHalts = new Map(), residuals = new Map() }: Remembered = {}
): VenueState {
	const states = new Map<string, FloorState>();
	const floorOfRobot = new Map<string, string>();
	for (const [key, context] of floors) {
		const state = createFloorState(context, openHalts.get(key) ?? [], residuals.get(key) ?? []);
		states.set(key, state);
		for (const robot of state.robots.keys()) floorOfRobot.set(robot, key);
	}
	return {
		floors: states,
		floorOfRobot,
		waiting: new Map(),
		learned: { flexibility: learn(states.values(), rules), at: -Infinity }
	};
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
	const learned =
		now - state.learned.at >= LEARN_EVERY_S
			? { flexibility: learn(routed.floors.values(), context.rules), at: now }
			: state.learned;
	for (const [key, floorContext] of context.floors) {
		const heard = routed.perFloor.get(key) ?? [];
		const step = stepFloor(floorContext, routed.floors.get(key)!, heard, now, learned.flexibility);
		floors.set(key, step.state);
		frames.push(step.frame);
		events.push(...step.events);
	}
	return { state: { floors, floorOfRobot: routed.floorOfRobot, waiting: routed.waiting, learned }, frames, events };
}

const learn = (floors: Iterable<FloorState>, { flexibility }: EngineRules): Flexibility =>
	currentFlexibility(
		[...floors].map((floor) => floor.flexibility),
		flexibility
	);

/** The venue with all forgotten that it had learned about how people give way. */
export function forgetFlexibility({ rules }: VenueContext, state: VenueState): VenueState {
	const floors = new Map([...state.floors].map(([key, floor]) => [key, { ...floor, flexibility: startFlexibility() }]));
	return { ...state, floors, learned: { flexibility: learn(floors.values(), rules), at: state.learned.at } };
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
