/** Taking in what robots say: clocks, poses, states and the people they see. */

import { applySimilarity, rotateHeading } from '../geometry/similarity.ts';
import type { Similarity } from '../geometry/types.ts';
import { stepClock } from '../tracking/clock.ts';
import type { PersonMeasurement, PersonScan } from '../tracking/person-tracks.ts';
import type { EngineEvent } from './events.ts';
import { isPrivate, type FloorModel } from './floor-model.ts';
import { isInView, type View } from './observed.ts';
import type { PeopleObservation, PoseObservation, RobotObservation, StateObservation } from './observation.ts';
import { latestPose, poseAt, withPose, type FloorTask, type RobotView } from './robot-view.ts';
import type { EngineRules } from './rules.ts';
import { isTurn } from './turn.ts';

export interface Heard {
	readonly view: RobotView;
	/** Who was seen, floor frame and corrected time; null when this was no such message */
	readonly scan: PersonScan | null;
	/** A look to be added to the observed area, or null */
	readonly look: View | null;
	readonly events: readonly EngineEvent[];
}

/** m; what a position without a stated deviation is taken to be worth (chosen by us: typical of a laser leg detector). */
const UNSTATED_SD_M = 0.1;
/** s; persons are placed only when the robot's own pose is this fresh. */
const POSE_FRESH_S = 2;
/** s between two looks of one robot that are drawn into the observed area; well inside the window of 2 s. */
const LOOK_EVERY_S = 0.4;

/** The robot's view after one observation, and what the observation adds to the picture of the floor. */
export function hear(model: FloorModel, rules: EngineRules, view: RobotView, observation: RobotObservation): Heard {
	const unchanged: Heard = { view, scan: null, look: null, events: [] };
	switch (observation.kind) {
		case 'connection':
			return { ...unchanged, view: { ...view, link: observation.status } };
		case 'state':
			return { ...unchanged, view: withTask(model, { ...view, state: observation }) };
		case 'pose':
		case 'people': {
			// Kept by a broker since nobody knows when: it neither says where the robot is now nor what its clock shows.
			if (observation.retained) return unchanged;
			const timed = hearTime(rules, view, observation);
			if (timed.time === null) return { ...unchanged, ...timed };
			const transform = model.floor.maps[observation.map];
			if (!transform) return { ...unchanged, view: timed.view, events: [unknownMap(observation), ...timed.events] };
			const heard =
				observation.kind === 'pose'
					? hearPose(model, timed.view, observation, transform, timed.time)
					: hearPeople(model, timed.view, observation, transform, timed.time);
			return { ...unchanged, ...heard, events: timed.events };
		}
	}
}

/** Corrected time of a message, or null with the reason as an event when its stamp cannot be right. */
function hearTime(rules: EngineRules, view: RobotView, said: PoseObservation | PeopleObservation) {
	const { state, verdict, offset, correctedTime } = stepClock(view.clock, said.robotTime, said.receivedAt, rules.clock);
	const next: RobotView = { ...view, clock: state, offset };
	const at = said.receivedAt;
	if (verdict === 'late' || verdict === 'future') {
		const ahead = (said.robotTime - offset - at).toFixed(1);
		const event: EngineEvent = {
			type: 'rejected',
			said,
			reason: verdict === 'late' ? 'past' : 'future',
			detail: `Stamp is ${ahead} s from the time of arrival by this robot's clock.`,
			at
		};
		return { view: next, time: null, events: [event] };
	}
	const events: EngineEvent[] = verdict === 'stepped' ? [{ type: 'clock_stepped', robot: said.robot, offset, at }] : [];
	return { view: next, time: correctedTime, events };
}

const unknownMap = (said: PoseObservation | PeopleObservation): EngineEvent => ({
	type: 'rejected',
	said,
	reason: 'unknown_map',
	detail: `No floor knows the map "${said.map}".`,
	at: said.receivedAt
});

function hearPose(model: FloorModel, view: RobotView, said: PoseObservation, transform: Similarity, time: number) {
	const last = latestPose(view);
	if (last && view.map === said.map && time <= last.time) return { view };
	const { x, y } = applySimilarity(transform, said.x, said.y);
	const pose = { x, y, heading: rotateHeading(transform, said.heading), speed: said.speed * transform.scale, time };
	const placed = withPose(view, said.map, pose);
	return { view: view.map === said.map ? placed : withTask(model, placed) };
}

function hearPeople(
	model: FloorModel,
	view: RobotView,
	said: PeopleObservation,
	transform: Similarity,
	time: number
): Omit<Heard, 'events'> {
	const pose = poseAt(view, time);
	if (!pose || Math.abs(pose.time - time) > POSE_FRESH_S || view.state?.localized === false) {
		return { view, scan: null, look: null };
	}
	const field = said.fieldOfView;
	const look: View = {
		x: pose.x,
		y: pose.y,
		range: said.range * transform.scale,
		fieldOfView: field ? [field[0] + pose.heading, field[1] + pose.heading] : null,
		blocked:
			said.blocked?.map(([x, y]) => {
				const corner = applySimilarity(transform, x, y);
				return [corner.x, corner.y] as const;
			}) ?? null,
		time
	};
	const persons: PersonMeasurement[] = [];
	const cos = Math.cos(transform.rotation) * transform.scale;
	const sin = Math.sin(transform.rotation) * transform.scale;
	for (const person of said.persons) {
		const { x, y } = applySimilarity(transform, person.x, person.y);
		if (isPrivate(model, x, y)) continue;
		const { vx, vy } = person;
		const known = vx !== null && vy !== null;
		persons.push({
			localId: person.id,
			x,
			y,
			vx: known ? cos * vx - sin * vy : null,
			vy: known ? sin * vx + cos * vy : null,
			sd: (person.sd ?? UNSTATED_SD_M) * transform.scale
		});
	}
	const scan: PersonScan = {
		robot: view.robot.key,
		time,
		persons,
		sees: (x, y) => isInView(model, look, x, y),
		reach: { x: look.x, y: look.y, radius: look.range }
	};
	const due = isTurn(view.robot.key, view.markedAt, time, LOOK_EVERY_S);
	return { view: due ? { ...view, markedAt: time } : view, scan, look: due ? look : null };
}

/** The robot with its task brought into the floor frame by the map it is on. */
export function withTask(model: FloorModel, view: RobotView): RobotView {
	const transform = view.map === null ? undefined : model.floor.maps[view.map];
	return { ...view, task: transform && view.state ? taskOnFloor(view.state, transform) : null };
}

function taskOnFloor({ tasked, task }: StateObservation, transform: Similarity): FloorTask | null {
	if (!tasked || !task) return null;
	return {
		id: task.id,
		goal: applySimilarity(transform, task.goal.x, task.goal.y),
		route: task.route?.map(({ x, y }) => applySimilarity(transform, x, y)) ?? null
	};
}
