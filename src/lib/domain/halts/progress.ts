/** How far has a robot got toward its goal, and when did it stop getting on? */

import type { Point } from '../geometry/types.ts';
import type { HaltRule } from './halt-rule.ts';

/** One pose of the history. Sums are relative to the start of the track. */
export interface ProgressPoint {
	/** s */
	readonly time: number;
	readonly x: number;
	readonly y: number;
	/** m toward the goal so far; falls when the robot backs off. */
	readonly progress: number;
	/** m driven so far, steps below the rule's `ditherStepM` left out. */
	readonly path: number;
	/** True when the remaining way changed by more than the robot moved: another route, or a relocated pose. */
	readonly jump: boolean;
}

/** Recent poses of one robot on one task, oldest first, never empty. */
export interface ProgressTrack {
	readonly points: readonly ProgressPoint[];
	/** m still to go at the newest pose; null while no goal is known. */
	readonly remaining: number | null;
	/** Where the last counted step of the path ended. */
	readonly anchor: Point;
}

interface TimedPose {
	readonly time: number;
	readonly x: number;
	readonly y: number;
}

/** Poses nearer in time are left out, which bounds the track whatever a robot sends. s; twice the highest rate asked for. */
const LEAST_SPACING_S = 0.05;
/** m beyond the distance moved by which the remaining way may change before it counts as another route; covers corners. */
const JUMP_SLACK_M = 0.5;
/** m/s; nothing in a venue drives faster, so the pose was relocated. */
const RELOCATED_SPEED = 5;
/** s to either side over which progress is averaged before the onset is read off, against localisation jitter. */
const SMOOTHING_S = 0.25;

/** A track of one pose. */
export function startTrack({ time, x, y }: TimedPose, remaining: number | null): ProgressTrack {
	return { points: [{ time, x, y, progress: 0, path: 0, jump: false }], remaining, anchor: { x, y } };
}

/**
 * The track with one more pose; the same track when the pose is not newer than the last one.
 * While no goal is known the way driven stands in for progress.
 *
 * @param keepS s of history to keep
 */
export function extendTrack(
	track: ProgressTrack,
	{ time, x, y }: TimedPose,
	remaining: number | null,
	rule: HaltRule,
	keepS: number
): ProgressTrack {
	const last = newest(track);
	const elapsed = time - last.time;
	if (!(elapsed >= LEAST_SPACING_S - 1e-6)) return track;

	const moved = Math.hypot(x - last.x, y - last.y);
	const relocated = moved > JUMP_SLACK_M && moved > RELOCATED_SPEED * elapsed;
	const fromAnchor = Math.hypot(x - track.anchor.x, y - track.anchor.y);
	const steps = relocated || fromAnchor >= rule.ditherStepM;
	const driven = steps && !relocated ? fromAnchor : 0;

	const gained = track.remaining === null || remaining === null ? driven : track.remaining - remaining;
	const jump = relocated || Math.abs(gained) > Math.max(moved, driven) + JUMP_SLACK_M;
	const point = {
		time,
		x,
		y,
		progress: last.progress + (jump ? 0 : gained),
		path: last.path + driven,
		jump
	};
	const from = track.points.findIndex((kept) => kept.time >= time - keepS);
	return {
		points: from < 0 ? [point] : [...track.points.slice(from), point],
		remaining,
		anchor: steps ? { x, y } : track.anchor
	};
}

/**
 * Progress in m over the last `rule.windowS` seconds of the track, or null when it cannot be said: the track is shorter,
 * or the robot moved across a gap in its poses. A robot found where it stood before a gap made no progress in it.
 */
export function progressInWindow(track: ProgressTrack, rule: HaltRule): number | null {
	const last = newest(track);
	const from = last.time - rule.windowS;
	const after = track.points.findIndex((point) => point.time > from + 1e-6);
	const start = after < 1 ? null : between(track.points[after - 1]!, track.points[after]!, from);
	if (!start) return null;
	for (let i = after; i < track.points.length; i++) {
		const a = track.points[i - 1]!;
		const b = track.points[i]!;
		const gap = b.time - a.time > rule.maxGapS;
		if (gap && Math.hypot(b.x - a.x, b.y - a.y) >= rule.minProgressM) return null;
	}
	return netProgress(track, start, after);
}

/** Progress in m within the last `seconds` of the track, or since its start when it is shorter. */
export function progressWithin(track: ProgressTrack, seconds: number): number {
	const first = indexSince(track, newest(track).time - seconds);
	return netProgress(track, track.points[first]!, first + 1);
}

/** Way driven in m within the last `seconds` of the track. */
export function pathWithin(track: ProgressTrack, seconds: number): number {
	return newest(track).path - track.points[indexSince(track, newest(track).time - seconds)]!.path;
}

/**
 * When the robot last got on at the rate the rule asks for (`minProgressM` per `windowS`), s: the maximum of
 * progress − rate · time over the track. Within 0.5 s of the stop for clean poses at 10 Hz. When the route changed within
 * the window, no later than the robot has been standing about here, as gains on alternating routes add up to nothing.
 */
export function computeOnset(track: ProgressTrack, rule: HaltRule): number {
	const rate = rule.minProgressM / rule.windowS;
	const { points } = track;
	let onset = points[0]!.time;
	let best = -Infinity;
	let from = 0;
	let to = 0;
	let sum = 0;
	for (const { time } of points) {
		for (; to < points.length && points[to]!.time <= time + SMOOTHING_S + 1e-6; to++) sum += points[to]!.progress;
		for (; points[from]!.time < time - SMOOTHING_S - 1e-6; from++) sum -= points[from]!.progress;
		const lead = sum / (to - from) - rate * time;
		if (lead > best + 1e-9) {
			best = lead;
			onset = time;
		}
	}
	const changed = points.some((point) => point.jump && point.time > newest(track).time - rule.windowS);
	return changed ? Math.min(onset, hereSince(track, rule.minProgressM)) : onset;
}

function hereSince({ points }: ProgressTrack, radius: number): number {
	const last = points[points.length - 1]!;
	const away = points.findLastIndex((point) => Math.hypot(point.x - last.x, point.y - last.y) >= radius);
	return points[away + 1]!.time;
}

/** The farthest a track has got, m from its start. */
export const bestProgress = (track: ProgressTrack): number =>
	track.points.reduce((best, point) => Math.max(best, point.progress), -Infinity);

export const newest = (track: ProgressTrack): ProgressPoint => track.points[track.points.length - 1]!;

/** m along the route: who drives beside it, round somebody, gets on as long as this point comes nearer (chosen by us). */
const AIM_AHEAD_M = 1.5;

/**
 * Way still to go in m: from (x, y) straight to the point of the route AIM_AHEAD_M beyond the nearest one, along the rest of
 * it, and from its end to the goal. On a straight route that is its rest; beside it, swerving costs little, as it does
 * a robot. With fewer than two route points, the straight distance to the goal.
 */
export function remainingAlong(route: readonly Point[], goal: Point, x: number, y: number): number {
	const end = route[route.length - 1];
	if (route.length < 2 || !end) return Math.hypot(goal.x - x, goal.y - y);
	const near = nearestOn(route, x, y);
	let ahead = AIM_AHEAD_M;
	let aim = near.point;
	let leg = near.leg;
	for (; leg < route.length; leg++) {
		const to = route[leg]!;
		const length = Math.hypot(to.x - aim.x, to.y - aim.y);
		if (length > ahead) {
			aim = { x: aim.x + ((to.x - aim.x) * ahead) / length, y: aim.y + ((to.y - aim.y) * ahead) / length };
			break;
		}
		ahead -= length;
		aim = to;
	}
	let rest = Math.hypot(aim.x - x, aim.y - y) + Math.hypot(goal.x - end.x, goal.y - end.y);
	for (let from = aim; leg < route.length; from = route[leg++]!) {
		rest += Math.hypot(route[leg]!.x - from.x, route[leg]!.y - from.y);
	}
	return rest;
}

/** Point of the route nearest to (x, y), the later one of equals, and the index of the route point that comes next. */
function nearestOn(route: readonly Point[], x: number, y: number): { point: Point; leg: number } {
	let least = Infinity;
	let found = { point: route[0]!, leg: 1 };
	for (let i = route.length - 1; i > 0; i--) {
		const a = route[i - 1]!;
		const b = route[i]!;
		const ex = b.x - a.x;
		const ey = b.y - a.y;
		const length2 = ex * ex + ey * ey;
		const share = length2 > 0 ? Math.min(1, Math.max(0, ((x - a.x) * ex + (y - a.y) * ey) / length2)) : 0;
		const point = { x: a.x + share * ex, y: a.y + share * ey };
		const aside = Math.hypot(point.x - x, point.y - y);
		if (aside < least) {
			least = aside;
			found = { point, leg: i };
		}
	}
	return found;
}

/**
 * A change of route is bridged, as the two remaining ways cannot be compared. A robot that switches to and fro between
 * routes would gain on each of them, so across a change it cannot have got on by more than it got away from the start.
 */
function netProgress(track: ProgressTrack, start: Pick<ProgressPoint, 'x' | 'y' | 'progress'>, from: number): number {
	const last = newest(track);
	const gained = last.progress - start.progress;
	for (let i = from; i < track.points.length; i++) {
		if (track.points[i]!.jump) return Math.min(gained, Math.hypot(last.x - start.x, last.y - start.y));
	}
	return gained;
}

function indexSince(track: ProgressTrack, time: number): number {
	const found = track.points.findIndex((point) => point.time >= time - 1e-6);
	return found < 0 ? track.points.length - 1 : found;
}

function between(a: ProgressPoint, b: ProgressPoint, time: number): Pick<ProgressPoint, 'x' | 'y' | 'progress'> {
	const share = b.time > a.time ? (time - a.time) / (b.time - a.time) : 0;
	const mix = (from: number, to: number) => from + share * (to - from);
	return { x: mix(a.x, b.x), y: mix(a.y, b.y), progress: mix(a.progress, b.progress) };
}
