/**
 * One floor, as a fold: `step(state, observations, now)` gives the next state, the frame and what happened.
 * Pure: it reads no clock, changes nothing it is given, and gives the same for the same input, live or replayed.
 */

import type { CauseGroup } from '../halts/cause-groups.ts';
import type { Robot } from '../floor.ts';
import {
	currentFlexibility,
	startFlexibility,
	stepFlexibility,
	type Flexibility,
	type FlexibilityState
} from '../room/flexibility.ts';
import {
	confirmedTracks,
	countSeeing,
	expireTracks,
	predictTrack,
	startTracker,
	stepTrackerAll,
	type PersonScan,
	type TrackerState
} from '../tracking/person-tracks.ts';
import { measureDensity, noDensity, type DensityStage } from './density-stage.ts';
import type { EngineEvent } from './events.ts';
import { isPrivate, zoneAt, type FloorModel } from './floor-model.ts';
import type { Frame, PersonPoint, RobotPicture } from './frame.ts';
import { hear } from './hear.ts';
import { conditionOf, judge, sampleOf } from './judge.ts';
import { lookAround, placesOf, type Surroundings } from './look-around.ts';
import { markSeen, nothingSeen, type SeenAt, type View } from './observed.ts';
import type { Observation } from './observation.ts';
import { latestPose, startRobotView, withMoment, type OpenHalt, type RobotView } from './robot-view.ts';
import type { EngineRules } from './rules.ts';
import { isTurn } from './turn.ts';
import {
	addDensity,
	addDrives,
	bandOf,
	closeMinutes,
	EMPTY_TALLY,
	stopClock,
	type Drive,
	type Tally
} from './tally.ts';

export interface FloorState {
	/** s, time of the last step */
	readonly time: number;
	readonly robots: ReadonlyMap<string, RobotView>;
	/** s since messages can reach us; null while they cannot */
	readonly listeningSince: number | null;
	readonly tracker: TrackerState;
	/** s, newest time at which anybody looked for people; −Infinity never */
	readonly scannedAt: number;
	readonly seenAt: SeenAt;
	readonly density: DensityStage;
	readonly flexibility: FlexibilityState;
	readonly groups: readonly CauseGroup[];
	readonly tally: Tally;
}

/** What stays the same over all steps of a floor. */
export interface FloorContext {
	readonly venue: string;
	readonly model: FloorModel;
	readonly rules: EngineRules;
	/** Robots of the venue by key */
	readonly robots: ReadonlyMap<string, Robot>;
}

export interface StepResult {
	readonly state: FloorState;
	readonly frame: Frame;
	readonly events: readonly EngineEvent[];
}

/** A floor nobody has spoken about yet. Halts that were open before a restart go on under the same name. */
export function createFloorState(
	{ model, robots }: FloorContext,
	openHalts: readonly OpenHalt[] = [],
	residuals: readonly number[] = []
): FloorState {
	const views = new Map<string, RobotView>();
	for (const open of openHalts) {
		const robot = robots.get(open.robot);
		if (robot) views.set(robot.key, startRobotView(robot, open));
	}
	return {
		time: -Infinity,
		robots: views,
		listeningSince: null,
		tracker: startTracker(),
		scannedAt: -Infinity,
		seenAt: nothingSeen(model),
		density: noDensity(model),
		flexibility: startFlexibility(residuals),
		groups: [],
		tally: EMPTY_TALLY
	};
}

/**
 * The floor after some more observations, at `now` (s, not before the last step).
 * Observations of robots the venue does not have are left out; the caller has reported them already.
 *
 * @param learned how people of the venue give way; from this floor alone when not given
 */
export function stepFloor(
	context: FloorContext,
	state: FloorState,
	observations: readonly Observation[],
	now: number,
	learned: Flexibility = currentFlexibility([state.flexibility], context.rules.flexibility)
): StepResult {
	const { model, rules } = context;
	const heard = hearAll(context, state, observations);
	const events: EngineEvent[] = heard.events;
	const tracker = expireTracks(heard.tracker, now, rules.tracker);
	const persons = personPoints(model, tracker, rules, now);
	const seenAt = markSeen(model, state.seenAt, heard.looks);

	let { density, tally, flexibility } = state;
	const densityDue = now - density.time >= rules.density.everyS - 1e-6;
	if (densityDue) {
		const seconds = Number.isFinite(density.time) ? Math.min(now - density.time, 2 * rules.density.everyS) : 0;
		// People are counted where they were last looked for, not where they are guessed to have gone since.
		const lookedAt = Math.min(now, Math.max(heard.scannedAt, now - rules.density.windowS));
		const counted = personPoints(model, tracker, rules, lookedAt);
		density = measureDensity(model, rules.density, counted, seenAt, density, now);
		tally = addDensity(tally, density.zones, now, seconds);
		const robots = [...heard.robots.values()].flatMap((view) => latestPose(view) ?? []);
		flexibility = stepFlexibility(flexibility, { time: now, tracks: persons, robots }, rules.flexibility);
	}
	const around: Surroundings = {
		persons,
		places: placesOf(persons),
		points: density.points,
		observed: density.observed,
		flexibility: learned.value
	};
	const canJudge =
		heard.listeningSince !== null && now - heard.listeningSince >= rules.halt.silentAfterS + HEARING_GRACE_S;
	let groups = state.groups;
	const robots = new Map<string, RobotView>();
	const drives: Drive[] = [];
	for (const [key, view] of heard.robots) {
		let next = lookIfDue(context, view, around, now);
		if (canJudge) {
			const judged = judge(context.venue, model, rules, next, groups, now);
			next = judged.view;
			groups = judged.groups;
			events.push(...judged.events);
		}
		const driven = driveOf(model, next, now);
		if (driven) drives.push(driven.drive);
		robots.set(key, driven?.view ?? next);
	}
	tally = addDrives(tally, drives);
	for (const event of events) {
		if (event.type !== 'halt_started') continue;
		const { robot, onset, zone, before, at } = event.halt;
		tally = stopClock(tally, robot, onset, zone, bandOf((before ?? at)?.density ?? null));
	}
	if (Math.floor(now / MINUTES_EVERY_S) !== Math.floor(state.time / MINUTES_EVERY_S)) {
		const closed = closeMinutes(tally, now);
		tally = closed.tally;
		if (closed.density.length + closed.exposure.length > 0) {
			const { density: zones, exposure } = closed;
			events.push({ type: 'minutes', floor: model.floor.key, density: zones, exposure });
		}
	}
	const { listeningSince, scannedAt } = heard;
	const next: FloorState = {
		time: now,
		robots,
		listeningSince,
		tracker,
		scannedAt,
		seenAt,
		density,
		flexibility,
		groups,
		tally
	};
	return { state: next, frame: frameOf(model, next, persons, learned, now), events };
}

/** s given to robots to be heard again after we could not listen, beside the time a silence takes. */
const HEARING_GRACE_S = 1;
/** s between two looks for finished minutes */
const MINUTES_EVERY_S = 5;

function hearAll({ model, rules, robots }: FloorContext, state: FloorState, observations: readonly Observation[]) {
	const views = new Map(state.robots);
	const scans: PersonScan[] = [];
	const looks: View[] = [];
	const events: EngineEvent[] = [];
	let { listeningSince, scannedAt } = state;
	for (const observation of observations) {
		if (observation.kind === 'listening') {
			listeningSince = observation.listening ? (listeningSince ?? observation.receivedAt) : null;
			continue;
		}
		const robot = robots.get(observation.robot);
		if (!robot) continue;
		const view = views.get(robot.key) ?? startRobotView(robot);
		const heard = hear(model, rules, view, observation);
		views.set(robot.key, heard.view);
		if (heard.scan) {
			scans.push(heard.scan);
			scannedAt = Math.max(scannedAt, heard.scan.time);
		}
		if (heard.look) looks.push(heard.look);
		events.push(...heard.events);
	}
	const tracker = stepTrackerAll(state.tracker, scans, rules.tracker);
	return { robots: views, tracker, looks, events, listeningSince, scannedAt };
}

function personPoints(model: FloorModel, tracker: TrackerState, rules: EngineRules, now: number): PersonPoint[] {
	const points: PersonPoint[] = [];
	for (const track of confirmedTracks(tracker, now, rules.tracker)) {
		const { x, y, vx, vy } = predictTrack(track, now);
		if (isPrivate(model, x, y)) continue;
		const seenBy = countSeeing(track, now, SEEN_NOW_S);
		points.push({ id: track.id, x, y, vx, vy, seenBy, age: Math.max(0, now - track.seenAt) });
	}
	return points;
}

/** s within which a robot counts as seeing a person now: two messages at the slowest usual rate. */
const SEEN_NOW_S = 1;

function lookIfDue({ model, rules }: FloorContext, view: RobotView, around: Surroundings, now: number): RobotView {
	const lastAt = view.moments.at(-1)?.time ?? -Infinity;
	if (!isTurn(view.robot.key, lastAt, now, rules.room.everyS)) return view;
	const moment = lookAround(model, rules, view, around, now);
	return moment ? withMoment(view, moment) : view;
}

/** s between two counts of exposure */
const COUNT_EVERY_S = 1;
/** s; a pose older than this says nothing about how the robot drives now */
const DRIVE_POSE_S = 2;

/** A second of driving: only of a robot that has a task, is heard, and is not halted. */
function driveOf(model: FloorModel, view: RobotView, now: number): { view: RobotView; drive: Drive } | null {
	const since = view.countedAt;
	if (since !== null && now - since < COUNT_EVERY_S - 1e-6) return null;
	const counted = { ...view, countedAt: now };
	const seconds = since === null ? 0 : Math.min(now - since, 2 * COUNT_EVERY_S);
	const pose = latestPose(view);
	const driving = view.state?.tasked === true && !view.open && !view.state.paused && !view.state.charging;
	const heard = pose !== null && now - pose.time <= DRIVE_POSE_S;
	const taskedS = driving && heard ? seconds : 0;
	const speed = Math.abs(pose?.speed ?? 0);
	const drive: Drive = {
		time: now,
		robot: view.robot.key,
		zone: pose ? zoneAt(model, pose.x, pose.y) : null,
		band: bandOf(view.moments.at(-1)?.density ?? null),
		taskedS,
		movingS: speed > 0.05 ? taskedS : 0,
		distance: speed * taskedS,
		halts: 0
	};
	return { view: counted, drive };
}

function frameOf(
	model: FloorModel,
	state: FloorState,
	persons: readonly PersonPoint[],
	flexibility: Frame['flexibility'],
	now: number
): Frame {
	const robots: RobotPicture[] = [];
	const halts: OpenHalt[] = [];
	for (const view of state.robots.values()) {
		const pose = latestPose(view);
		if (view.open) halts.push(view.open);
		robots.push({
			view,
			pose,
			condition: conditionOf(view, sampleOf(model.floor, view, now)),
			zone: pose ? zoneAt(model, pose.x, pose.y) : null,
			moment: view.moments.at(-1) ?? null
		});
	}
	const { zones, field, observedArea, coverage } = state.density;
	return {
		floor: model.floor.key,
		time: now,
		robots,
		persons,
		zones,
		halts,
		observedArea,
		coverage,
		field,
		flexibility
	};
}
