/** One scored run: the simulated venue through the real gate and the real engine, with what truly happened beside it. */

import { robotTopic } from '../../src/lib/contracts/mqtt.ts';
import type { EngineEvent } from '../../src/lib/domain/engine/events.ts';
import type { Observation, RejectionReason } from '../../src/lib/domain/engine/observation.ts';
import { DEFAULT_RULES, type EngineRules } from '../../src/lib/domain/engine/rules.ts';
import {
	createVenueContext,
	createVenueState,
	stepVenue,
	type VenueContext,
	type VenueState
} from '../../src/lib/domain/engine/venue-engine.ts';
import { createIntake } from '../../src/lib/server/ingest/intake.ts';
import type { Delivery } from '../transport/link.ts';
import { fleetOf, SALTMARSH } from '../venue/saltmarsh.ts';
import { World } from '../world.ts';
import { DensityScore } from './density-score.ts';
import type { DetectedHalt, ExpectedHalt } from './halt-score.ts';
import { PersonScore } from './person-score.ts';
import { scoreScenario, type FaultChoice } from './scenario.ts';
import { TrueHalts } from './true-halts.ts';
import { TrueMoments } from './true-moments.ts';

export interface ScoreOptions {
	readonly seed: number;
	/** Simulated hours */
	readonly hours: number;
	readonly faults: FaultChoice;
	readonly robots: number;
	/** Most persons in the venue; null for as many as in the demo */
	readonly people: number | null;
	/** Rules to try; the default ones when left out. What is true follows the halt and room rules tried. */
	readonly rules?: EngineRules;
	/** Shown everything after each step of 0.1 s; it must not change anything. */
	readonly onStep?: (world: World, state: VenueState) => void;
}

/** Everything a run leaves behind. Times in s since its start. */
export interface Evidence {
	readonly truths: readonly ExpectedHalt[];
	readonly found: readonly DetectedHalt[];
	readonly density: DensityScore;
	readonly persons: PersonScore;
	/** ms, one reading per robot and ten seconds: offset the engine believes less the true one */
	readonly clockErrors: readonly number[];
	readonly seconds: number;
	readonly robots: number;
	/** s robots were truly under way, all together */
	readonly taskedS: number;
	readonly messages: number;
	readonly rejected: ReadonlyMap<RejectionReason, number>;
	readonly personsMean: number;
}

const STEP_S = 0.1;
/** s since 1970 at the start of every run, so that a run does not depend on the day it is made. */
const EPOCH_S = 1_780_308_000;
/** s left out at the start, while tracks, clocks and crowd settle */
export const WARM_UP_S = 30;
/** s between two readings of clocks, and two pictures of a floor in which persons are paired one by one */
const SAMPLE_EVERY_S = 10;

/** Runs the simulation as fast as the machine can. The same options give the same evidence. */
export function runScore({
	seed,
	hours,
	faults,
	robots,
	people,
	onStep,
	rules = DEFAULT_RULES
}: ScoreOptions): Evidence {
	const fleet = fleetOf(robots);
	const scenario = scoreScenario(faults, people);
	const world = new World({ venue: SALTMARSH, fleet, scenario, seed, epoch: EPOCH_S });
	const floors = SALTMARSH.floors.map(({ floor }) => floor);
	const context = createVenueContext(SALTMARSH.venue.key, floors, fleet, rules);
	const models = floors.map(({ key }) => context.floors.get(key)!.model);
	const moments = new TrueMoments(world, models, rules);
	const halts = new TrueHalts(world, moments, rules.halt);
	const known = new Set(fleet.map(({ key }) => key));
	const rejected = new Map<RejectionReason, number>();
	const reject = (reason: RejectionReason) => void rejected.set(reason, (rejected.get(reason) ?? 0) + 1);
	let waiting: Observation[] = [{ kind: 'listening', receivedAt: EPOCH_S, listening: true }];
	const intake = createIntake({
		robots: (venue, robot) => venue === SALTMARSH.venue.key && known.has(robot),
		rejected: { record: ({ reason }) => reject(reason) },
		onObservation: (_venue, observation) => void waiting.push(observation)
	});

	const found = new FoundHalts();
	const density = new DensityScore();
	const persons = new PersonScore();
	const clockErrors: number[] = [];
	let state = createVenueState(context);
	let personSum = 0;
	let sampledAt = -Infinity;
	const steps = Math.round((hours * 3600) / STEP_S);
	for (let step = 1; step <= steps; step++) {
		for (const delivery of world.step(STEP_S)) deliver(delivery, intake.take);
		moments.step();
		halts.step();
		const now = EPOCH_S + world.time;
		const result = stepVenue(context, state, waiting, now);
		waiting = [];
		state = result.state;
		for (const event of result.events) {
			if (event.type === 'rejected') reject(event.reason);
			else found.take(event);
		}
		personSum += world.floors.reduce((sum, floor) => sum + floor.people.count, 0);
		onStep?.(world, state);
		if (world.time < WARM_UP_S) continue;
		const due = world.time - sampledAt >= SAMPLE_EVERY_S - 1e-6;
		// Clocks and persons are looked at when there is a fresh result to compare.
		if (compareFloors(context, state, world, now, density, persons, due) && due) {
			readClocks(state, world, clockErrors);
			sampledAt = world.time;
		}
	}
	return {
		truths: halts.finish(),
		found: found.halts,
		density,
		persons,
		clockErrors,
		seconds: world.time,
		robots: fleet.length,
		taskedS: world.truth.taskedSeconds,
		messages: intake.received(),
		rejected,
		personsMean: personSum / steps
	};
}

type Take = (topic: string, payload: Buffer, retained: boolean, receivedAtMs: number) => void;

/** As a broker would hand it on: bytes on a topic, with the time of arrival. */
function deliver({ robot, channel, payload, arrivesAt }: Delivery, take: Take): void {
	const body = Buffer.from(typeof payload === 'string' ? payload : JSON.stringify(payload));
	const topic = robotTopic(SALTMARSH.venue.key, robot, channel as 'pose');
	take(topic, body, false, Math.round((EPOCH_S + arrivesAt) * 1000));
}

/** True when there were results of this moment. */
function compareFloors(
	context: VenueContext,
	state: VenueState,
	world: World,
	now: number,
	density: DensityScore,
	persons: PersonScore,
	matched: boolean
): boolean {
	let fresh = false;
	for (const { model, people } of world.floors) {
		const measured = state.floors.get(model.floor.key)!.density;
		if (measured.time !== now) continue;
		fresh = true;
		const floor = context.floors.get(model.floor.key)!.model;
		density.add(floor, measured.zones, measured.observed, people);
		persons.add(floor, measured.observed, measured.points, people, matched);
	}
	return fresh;
}

function readClocks(state: VenueState, world: World, into: number[]): void {
	for (const { robots } of state.floors.values()) {
		for (const [key, { offset }] of robots) {
			const link = world.agent(key)?.link;
			if (link && offset !== null) into.push((offset - link.offset - world.time * link.drift) * 1000);
		}
	}
}

/** Halts as the events tell them. */
class FoundHalts {
	readonly halts: DetectedHalt[] = [];
	readonly #open = new Map<string, number>();

	take(event: EngineEvent): void {
		if (event.type === 'halt_started') {
			const { robot, kind, onset, detectedAt, verdict, incident } = event.halt;
			this.#open.set(incident, this.halts.length);
			this.halts.push({
				robot,
				kind,
				lastKind: kind,
				onset: onset - EPOCH_S,
				detectedAt: detectedAt - EPOCH_S,
				end: null,
				verdict,
				changes: []
			});
		} else if (event.type === 'halt_changed' || event.type === 'halt_ended') {
			const index = this.#open.get(event.halt.incident);
			if (index === undefined) return;
			const halt = this.halts[index]!;
			this.halts[index] = event.type === 'halt_changed' ? changed(halt, event) : { ...halt, end: event.at - EPOCH_S };
		}
	}
}

function changed(halt: DetectedHalt, event: Extract<EngineEvent, { type: 'halt_changed' }>): DetectedHalt {
	const { kind } = event.halt;
	return { ...halt, lastKind: kind, changes: [...halt.changes, { kind, at: event.at - EPOCH_S }] };
}
