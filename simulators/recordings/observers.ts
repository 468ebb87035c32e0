/** Turns a recording into what one or several robots would have sent. One people message per recorded instant, none between. */

import type { People, Pose, State } from '../../src/lib/contracts/mqtt.ts';
import type { Floor, Robot } from '../../src/lib/domain/floor.ts';
import { MapFrame } from '../core/floor-world.ts';
import { boundsOf } from '../../src/lib/domain/geometry/polygon.ts';
import { OBSERVER, RECORDED_ROBOT } from './floor.ts';
import type { RecordedPose, Recording } from './parse.ts';

export interface Observer {
	readonly robot: Robot;
	readonly frame: MapFrame;
	/** m; people farther away are not in its messages */
	readonly range: number;
	/** Where it stands; null for one that moves with the recorded robot */
	readonly stand: { readonly x: number; readonly y: number } | null;
}

/** A message before it has a clock: `at` is seconds from the start of the recording. */
export type Timed =
	| { readonly at: number; readonly channel: 'people'; readonly message: Omit<People, 't' | 'seq'> }
	| { readonly at: number; readonly channel: 'pose'; readonly message: Omit<Pose, 't' | 'seq'> }
	| { readonly at: number; readonly channel: 'state'; readonly message: Omit<State, 't' | 'seq'> };

/** m, standard deviation sent with positions: what three decimals leave */
const POSITION_SD = 0.0005;
/** s; a standing observer says where it is and how it does at least this often */
const POSE_EVERY = 0.5;
const STATE_EVERY = 4;

/**
 * The recorded robot where there is one, else `count` standing observers. One observer sees the whole floor; several stand in a
 * row along the longer side with ranges that overlap and together cover it.
 */
export function observersOf(recording: Recording, floor: Floor, count: number, turned: boolean): Observer[] {
	const maps = Object.entries(floor.maps);
	const [name, toFloor] = turned ? maps[1]! : maps[0]!;
	const frame = new MapFrame(name, toFloor);
	const { minX, minY, maxX, maxY } = boundsOf(floor.walkable);
	const [width, height] = [maxX - minX, maxY - minY];
	const diagonal = Math.hypot(width, height);
	if (recording.robot) {
		const robot = { key: `${floor.key}-robot`, mark: 'R1', model: RECORDED_ROBOT };
		return [{ robot, frame, range: Math.ceil(diagonal + 1), stand: null }];
	}
	const long = Math.max(width, height);
	const short = Math.min(width, height);
	// A quarter more than half a spacing, so that neighbours share people.
	const reach = count === 1 ? diagonal / 2 : Math.hypot((long / count / 2) * 1.5, short / 2);
	return Array.from({ length: count }, (_, i) => {
		const share = (i + 0.5) / count;
		const stand =
			width >= height
				? { x: minX + share * width, y: (minY + maxY) / 2 }
				: { x: (minX + maxX) / 2, y: minY + share * height };
		const robot = { key: `${floor.key}-${i + 1}`, mark: `O${i + 1}`, model: OBSERVER };
		return { robot, frame, range: Math.ceil(reach * 10 + 10) / 10, stand };
	});
}

/** Everything one observer sends, in order of time. Velocities only where the recording has them. */
export function timelineOf(recording: Recording, observer: Observer): Timed[] {
	const { frame, range, stand } = observer;
	const messages: Timed[] = [];
	const poses = recording.robot;
	const end = Math.max(recording.frames.at(-1)?.time ?? 0, poses?.at(-1)?.time ?? 0);
	for (let at = 0; at <= end; at += STATE_EVERY) messages.push({ at, channel: 'state', message: STANDING_BY });
	if (stand)
		for (let at = 0; at <= end; at += POSE_EVERY)
			messages.push({ at, channel: 'pose', message: poseAt(frame, stand, 0, 0) });
	else
		poses?.forEach((pose, i) =>
			messages.push({ at: pose.time, channel: 'pose', message: recordedPose(frame, poses, pose, i) })
		);
	let place = 0;
	for (const { time, people } of recording.frames) {
		while (poses && place + 1 < poses.length && poses[place + 1]!.time <= time) place++;
		const at = stand ?? poses![place]!;
		const persons = people
			.filter(({ x, y }) => Math.hypot(x - at.x, y - at.y) <= range)
			.map(({ id, x, y, vx, vy }) => ({
				id,
				x: exact(frame.x(x, y)),
				y: exact(frame.y(x, y)),
				...(vx !== null && vy !== null ? { vx: exact(frame.dx(vx, vy)), vy: exact(frame.dy(vx, vy)) } : {}),
				sd: POSITION_SD
			}));
		messages.push({ at: time, channel: 'people', message: { map: frame.name, range_m: range, persons } });
	}
	const order = { state: 0, pose: 1, people: 2 };
	return messages.sort((a, b) => a.at - b.at || order[a.channel] - order[b.channel]);
}

/** Nobody knows what a recorded robot was meant to do, so it claims no task and no halt can be read into it. */
const STANDING_BY: Omit<State, 't' | 'seq'> = {
	tasked: false,
	mode: 'automatic',
	paused: false,
	estop: false,
	charging: false,
	battery: 1,
	localized: true,
	errors: [],
	software: 'recording'
};

function poseAt(
	frame: MapFrame,
	{ x, y }: { x: number; y: number },
	heading: number,
	speed: number
): Omit<Pose, 't' | 'seq'> {
	return { map: frame.name, x: exact(frame.x(x, y)), y: exact(frame.y(x, y)), heading: frame.heading(heading), speed };
}

/** Speed (and heading where it was not recorded) come from the step before: the contract asks for them. */
function recordedPose(
	frame: MapFrame,
	poses: readonly RecordedPose[],
	pose: RecordedPose,
	i: number
): Omit<Pose, 't' | 'seq'> {
	const before = poses[i - 1];
	const sameTake = before && before.run === pose.run && pose.time > before.time;
	const [dx, dy] = sameTake ? [pose.x - before.x, pose.y - before.y] : [0, 0];
	const speed = sameTake ? Math.min(20, Math.hypot(dx, dy) / (pose.time - before.time)) : 0;
	const heading = pose.heading ?? (speed > 0.05 ? Math.atan2(dy, dx) : 0);
	return poseAt(frame, pose, heading, Number(speed.toFixed(4)));
}

/** Six decimals: turning into a map and back moves nobody by more than a micrometre. */
const exact = (value: number): number => Math.round(value * 1e6) / 1e6;
