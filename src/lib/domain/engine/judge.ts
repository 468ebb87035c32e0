/** Is this robot halted? Feeds the halt detector from the robot's view and keeps the incident's record. */

import type { Floor } from '../floor.ts';
import { assignCauseGroup, type CauseGroup } from '../halts/cause-groups.ts';
import { stepHalt, type RobotSample } from '../halts/halt-detector.ts';
import { remainingAlong } from '../halts/progress.ts';
import type { EngineEvent } from './events.ts';
import { zoneAt, type FloorModel } from './floor-model.ts';
import type { Condition } from './frame.ts';
import type { Mode } from './observation.ts';
import { incidentName, latestPose, poseAt, type Moment, type OpenHalt, type RobotView } from './robot-view.ts';
import type { EngineRules } from './rules.ts';

export interface Judged {
	readonly view: RobotView;
	readonly groups: readonly CauseGroup[];
	readonly events: readonly EngineEvent[];
}

const DRIVES_ITSELF: ReadonlySet<Mode> = new Set(['automatic', 'semiautomatic']);

/** m from the goal at which a robot counts as having arrived, beside its own radius (chosen by us). */
const ARRIVED_M = 0.5;

/** One robot, one tick. Not to be called while no robot can be heard: silence would prove nothing. */
export function judge(
	venue: string,
	model: FloorModel,
	rules: EngineRules,
	view: RobotView,
	groups: readonly CauseGroup[],
	now: number
): Judged {
	const sample = sampleOf(model.floor, view, now);
	const { state: halt, event } = stepHalt(view.halt, sample, rules.halt);
	const next: RobotView = { ...view, halt, remaining: sample.remaining };
	const floor = model.floor.key;
	if (!event) return { view: next, groups, events: [] };

	switch (event.type) {
		case 'started': {
			const begun = beginHalt(venue, model, next, event.kind, event.onset, event.detectedAt);
			const place = { id: begun.incident, floor, x: begun.x, y: begun.y, onset: begun.onset };
			const assigned = assignCauseGroup(groups, place, rules.cause);
			const open: OpenHalt = { ...begun, causeGroup: assigned.group };
			return {
				view: { ...next, open },
				groups: assigned.groups,
				events: [{ type: 'halt_started', floor, halt: open }]
			};
		}
		case 'changed': {
			if (!view.open) return { view: next, groups, events: [] };
			const open: OpenHalt = { ...view.open, kind: event.kind };
			const changed: EngineEvent = { type: 'halt_changed', floor, halt: open, was: view.open.kind, at: now };
			return { view: { ...next, open }, groups, events: [changed] };
		}
		case 'ended': {
			const ended: Judged = { view: { ...next, open: null }, groups, events: [] };
			if (!view.open) return ended;
			const { at, reason } = event;
			return { ...ended, events: [{ type: 'halt_ended', floor, halt: view.open, at, reason }] };
		}
	}
}

/** Everything the detector may look at. Unknown stays unknown: without a word from the robot it has no task. */
export function sampleOf(floor: Floor, view: RobotView, now: number): RobotSample {
	const pose = latestPose(view);
	const { state, task } = view;
	const moment = view.moments.at(-1) ?? null;
	const toGoal = pose && task ? Math.hypot(task.goal.x - pose.x, task.goal.y - pose.y) : null;
	const blocking = state?.errors.find(({ level }) => level === 'critical' || level === 'fatal');
	return {
		time: now,
		pose,
		remaining: pose && task ? remainingAlong(task.route ?? [], task.goal, pose.x, pose.y) : null,
		taskId: task?.id ?? null,
		tasked: state?.tasked ?? false,
		automatic: state !== null && DRIVES_ITSELF.has(state.mode),
		paused: state?.paused ?? false,
		charging: state?.charging ?? false,
		estop: state?.estop ?? false,
		localized: state?.localized ?? true,
		blockingError: blocking?.code ?? null,
		link: view.link,
		atWaitingPlace:
			pose !== null && floor.waitingPlaces.some(({ x, y, radius }) => Math.hypot(pose.x - x, pose.y - y) <= radius),
		nearGoal: toGoal !== null && toGoal <= ARRIVED_M + view.robot.model.radius,
		nearestPerson: moment?.nearestPerson ?? null,
		roomAlone: moment?.roomAlone ?? null,
		roomLimitedByPeople: moment?.limitedByPeople ?? null
	};
}

function beginHalt(
	venue: string,
	model: FloorModel,
	view: RobotView,
	kind: OpenHalt['kind'],
	onset: number,
	detectedAt: number
): OpenHalt {
	const pose = poseAt(view, onset) ?? { x: NaN, y: NaN, heading: 0 };
	const { before, at } = momentsAround(view.moments, onset);
	return {
		incident: incidentName(venue, view.robot.key, onset),
		robot: view.robot.key,
		kind,
		verdict: at?.verdict ?? before?.verdict ?? 'unseen',
		onset,
		detectedAt,
		x: pose.x,
		y: pose.y,
		heading: pose.heading,
		zone: zoneAt(model, pose.x, pose.y),
		causeGroup: '',
		before,
		at,
		taskId: view.task?.id ?? null,
		software: view.state?.software ?? null
	};
}

/** s; a moment further from onset than this says nothing about it. */
const MOMENT_NEAR_S = 1.5;

/** The last moment before onset and the one nearest to it. Later moments do not count: people drain away or close in. */
export function momentsAround(moments: readonly Moment[], onset: number): { before: Moment | null; at: Moment | null } {
	let before: Moment | null = null;
	let at: Moment | null = null;
	for (const moment of moments) {
		const gap = Math.abs(moment.time - onset);
		if (gap > MOMENT_NEAR_S) continue;
		if (moment.time <= onset) before = moment;
		if (!at || gap < Math.abs(at.time - onset)) at = moment;
	}
	return { before, at };
}

/** The one word for what a robot is doing, worst first. */
export function conditionOf(view: RobotView, sample: RobotSample): Condition {
	if (view.open) {
		if (view.open.kind === 'silent' || view.open.kind === 'fault') return view.open.kind;
		return 'halted';
	}
	if (!sample.pose || sample.time - sample.pose.time > SILENT_LOOK_S) return 'silent';
	if (sample.charging) return 'charging';
	if (sample.paused) return 'paused';
	if (!view.state) return 'idle';
	if (!sample.automatic) return 'manual';
	if (!sample.tasked) return 'idle';
	return sample.atWaitingPlace && Math.abs(sample.pose.speed) < 0.05 ? 'waiting' : 'working';
}

/** s without a pose after which a robot is drawn hollow, tasked or not. */
const SILENT_LOOK_S = 3;
