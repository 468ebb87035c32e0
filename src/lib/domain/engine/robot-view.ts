/** What the engine knows of one robot. Belongs to the robot, not the floor: it goes along when the robot changes floors. */

import type { Robot } from '../floor.ts';
import { restoreHalt, startHaltState, type HaltKind, type HaltState } from '../halts/halt-detector.ts';
import type { Point } from '../geometry/types.ts';
import type { Verdict } from '../room/room.ts';
import { startClock, type ClockState } from '../tracking/clock.ts';
import type { ConnectionObservation, StateObservation } from './observation.ts';

/** Floor frame, corrected time. */
export interface FloorPose {
	readonly x: number;
	readonly y: number;
	/** rad */
	readonly heading: number;
	/** m/s */
	readonly speed: number;
	/** s, server clock */
	readonly time: number;
}

/** One evaluation of the surroundings of a robot: the stuff evidence is made of. */
export interface Moment {
	/** s, server clock */
	readonly time: number;
	readonly density: number | null;
	readonly coverage: number;
	readonly personsWithin2m: number;
	/** m, centre to centre; null when nobody is in sight */
	readonly nearestPerson: number | null;
	/** m/s; null when the robot has nowhere to go */
	readonly roomAlone: number | null;
	readonly roomShared: number | null;
	/** Room alone is below the go threshold, and would not be if the people were not there */
	readonly limitedByPeople: boolean | null;
	/** Observed share of the disc the robot could reach */
	readonly observedShare: number;
	/** m/s used for room shared */
	readonly flexibility: number;
	readonly verdict: Verdict;
}

/** A halt that has been detected and has not ended. */
export interface OpenHalt {
	readonly incident: string;
	readonly robot: string;
	readonly kind: HaltKind;
	readonly verdict: Verdict;
	/** s */
	readonly onset: number;
	readonly detectedAt: number;
	readonly x: number;
	readonly y: number;
	readonly heading: number;
	readonly zone: string | null;
	readonly causeGroup: string;
	/** Just before onset; null when nothing had been evaluated by then */
	readonly before: Moment | null;
	/** Nearest to onset */
	readonly at: Moment | null;
	readonly taskId: string | null;
	readonly software: string | null;
}

/** A robot's task brought into the floor frame. */
export interface FloorTask {
	readonly id: string;
	readonly goal: Point;
	/** Corner points, null when the robot sends none */
	readonly route: readonly Point[] | null;
}

export interface RobotView {
	readonly robot: Robot;
	readonly clock: ClockState;
	/** s, robot clock minus server clock; null before the first timed message */
	readonly offset: number | null;
	/** Newest last, at most `POSES_KEPT`; all of one map */
	readonly poses: readonly FloorPose[];
	readonly map: string | null;
	readonly state: StateObservation | null;
	/** Null without a task or before the map is known */
	readonly task: FloorTask | null;
	readonly link: ConnectionObservation['status'] | 'unknown';
	readonly halt: HaltState;
	readonly open: OpenHalt | null;
	/** Newest last, kept long enough to look back past the detection of a halt */
	readonly moments: readonly Moment[];
	/** m; null without a task */
	readonly remaining: number | null;
	/** s of the last look that was added to the observed area */
	readonly markedAt: number;
	/** s, last time its speed and exposure were counted */
	readonly countedAt: number | null;
}

const POSES_KEPT = 24;
/** 20 s at the usual two a second */
const MOMENTS_KEPT = 40;

export function startRobotView(robot: Robot, open: OpenHalt | null = null): RobotView {
	return {
		robot,
		clock: startClock(),
		offset: null,
		poses: [],
		map: null,
		state: null,
		task: null,
		link: 'unknown',
		halt: open ? restoreHalt(open) : startHaltState(),
		open,
		moments: [],
		remaining: null,
		markedAt: -Infinity,
		countedAt: null
	};
}

export const latestPose = (view: RobotView): FloorPose | null => view.poses.at(-1) ?? null;

export const withPose = (view: RobotView, map: string, pose: FloorPose): RobotView => ({
	...view,
	map,
	// Positions of two maps do not belong to one path, so a new map starts a new one.
	poses: view.map === map ? [...view.poses.slice(1 - POSES_KEPT), pose] : [pose]
});

export const withMoment = (view: RobotView, moment: Moment): RobotView => ({
	...view,
	moments: [...view.moments.slice(1 - MOMENTS_KEPT), moment]
});

/** Where the robot was at `time`, from the kept poses; the nearest of them outside their span. Null without poses. */
export function poseAt(view: RobotView, time: number): FloorPose | null {
	const { poses } = view;
	const after = poses.findIndex((pose) => pose.time >= time);
	if (after < 0) return poses.at(-1) ?? null;
	const next = poses[after]!;
	const previous = poses[after - 1];
	if (!previous || next.time === previous.time) return next;
	const share = (time - previous.time) / (next.time - previous.time);
	return {
		...next,
		time,
		x: previous.x + share * (next.x - previous.x),
		y: previous.y + share * (next.y - previous.y)
	};
}

/** Incident name: the same halt always gets the same one, so writing it twice changes nothing. */
export const incidentName = (venue: string, robot: string, onset: number): string =>
	`${venue}.${robot}.${Math.round(onset * 1000)}`;
