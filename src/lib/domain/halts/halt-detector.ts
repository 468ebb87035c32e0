/** Is a robot halted, since when, and of what kind? One state per robot; pure: the caller brings the clock and the data. */

import type { Point } from '../geometry/types.ts';
import type { HaltRule } from './halt-rule.ts';
import {
	bestProgress,
	computeOnset,
	extendTrack,
	newest,
	pathWithin,
	progressInWindow,
	progressWithin,
	startTrack,
	type ProgressTrack
} from './progress.ts';

/** `freeze`: people in the way; `stall`: nobody; `dither`: driving, not advancing; `fault`: the robot says so; `silent`: no data. */
export type HaltKind = 'freeze' | 'stall' | 'dither' | 'fault' | 'silent';

/** Why a halt is over. `planned`: at a waiting place or near the goal. */
type HaltEnd = 'progress' | 'task_ended' | 'task_changed' | 'manual' | 'charging' | 'paused' | 'planned';

/** What is known about a robot at one moment. Seconds, metres, floor frame. */
export interface RobotSample {
	/** s, the desk's clock; samples older than the last one are ignored. */
	readonly time: number;
	/** Latest pose, `time` on the desk's clock; null while none was received. */
	readonly pose: {
		readonly x: number;
		readonly y: number;
		readonly heading: number;
		readonly speed: number;
		readonly time: number;
	} | null;
	/** m still to go at the latest pose, see `remainingAlong`; null without a known goal. */
	readonly remaining: number | null;
	readonly taskId: string | null;
	/** As the robot last said, also while it is silent. */
	readonly tasked: boolean;
	readonly automatic: boolean;
	readonly paused: boolean;
	readonly charging: boolean;
	readonly estop: boolean;
	readonly localized: boolean;
	/** Code of a critical or fatal error, null without one. */
	readonly blockingError: string | null;
	/** As the connection message says; `offline` is an intended goodbye, `unknown` before any word. */
	readonly link: 'online' | 'offline' | 'lost' | 'unknown';
	readonly atWaitingPlace: boolean;
	readonly nearGoal: boolean;
	/** m to the nearest fused person; null when none is seen or nothing is observed. */
	readonly nearestPerson: number | null;
	/** m/s toward the goal if nobody yields; null when not evaluated. */
	readonly roomAlone: number | null;
	/** Whether people, not walls, bound the room alone; null when not evaluated. */
	readonly roomLimitedByPeople: boolean | null;
}

export type HaltEvent =
	| { readonly type: 'started'; readonly kind: HaltKind; readonly onset: number; readonly detectedAt: number }
	| { readonly type: 'changed'; readonly kind: HaltKind; readonly at: number }
	| { readonly type: 'ended'; readonly at: number; readonly reason: HaltEnd };

export interface OpenHalt {
	readonly kind: HaltKind;
	/** s, when progress stopped (fault: first report; silent: last pose or loss of the link). */
	readonly onset: number;
	readonly detectedAt: number;
}

/** Treat as opaque except `open`; one per robot, bounded in size. */
export interface HaltState {
	readonly open: OpenHalt | null;
	readonly time: number;
	readonly firstTime: number;
	/** undefined before the first sample */
	readonly taskId: string | null | undefined;
	readonly lostAt: number | null;
	readonly track: ProgressTrack | null;
	/** Since when progress has been below the limit; null while it is not, or cannot be said. */
	readonly belowSince: number | null;
	/** Whether people were near or in the way, oldest first. */
	readonly people: readonly { readonly time: number; readonly near: boolean }[];
	/** Kind of the open halt under a silence; null when nothing but silence is known. */
	readonly kindBeneath: Exclude<HaltKind, 'silent'> | null;
	/** When a fault or a silence was last the case, s; only what is driven afterwards ends the halt. */
	readonly troubleAt: number;
	/** m of progress a robot that stopped must get beyond before it counts as getting on; null after a fault or a silence. */
	readonly farthest: number | null;
	/** Where it stood when the halt was noticed; null for a dither, which has no such place. */
	readonly place: Point | null;
}

/** s of history beyond what the rule needs, so that an onset in slow traffic is still inside. */
const HISTORY_MARGIN_S = 4;
/** s; people are looked at no more often than this, which bounds the history. */
const PEOPLE_SPACING_S = 0.05;

/** State of a robot nothing is known about. */
export function startHaltState(): HaltState {
	return {
		open: null,
		time: -Infinity,
		firstTime: Infinity,
		taskId: undefined,
		lostAt: null,
		track: null,
		belowSince: null,
		people: [],
		kindBeneath: null,
		troubleAt: -Infinity,
		farthest: null,
		place: null
	};
}

/** State after a restart of the desk with a halt still open; it ends by the usual rules once the robot is heard again. */
export function restoreHalt(open: OpenHalt): HaltState {
	return { ...startHaltState(), open, kindBeneath: open.kind === 'silent' ? null : open.kind };
}

/**
 * State of a robot after one more sample, and what happened, at most one event per sample.
 * Works at 2–10 samples per second; a sample older than the last one (or with a NaN time) changes nothing.
 *
 * Fault and silence are immediate and are not excused by a pause or a waiting place; silence is excused by charging and
 * manual mode, a fault other than e-stop by manual mode. A fault lasts until the robot gets on again.
 */
export function stepHalt(
	state: HaltState,
	sample: RobotSample,
	rule: HaltRule
): { state: HaltState; event: HaltEvent | null } {
	if (!(sample.time >= state.time)) return { state, event: null };
	const unheard = sample.link === 'unknown' && sample.pose === null;
	if (unheard && state.open) return { state, event: null };

	const next = observe(state, sample, rule);
	return state.open ? stepOpen(next, state.open, state.taskId, sample, rule) : stepClosed(next, sample, rule);
}

type Step = { state: HaltState; event: HaltEvent | null };

function stepClosed(state: HaltState, sample: RobotSample, rule: HaltRule): Step {
	const faulty = isFaulty(sample);
	const silent = silentSince(state, sample, rule);
	if (silent !== null) return open(state, 'silent', silent, faulty ? 'fault' : null, sample.time);
	if (faulty) return open(state, 'fault', sample.time, 'fault', sample.time);
	const stop = findStop(state, sample, rule);
	if (!stop) return { state, event: null };
	return open(state, stop.kind, stop.onset, stop.kind, sample.time);
}

function stepOpen(
	state: HaltState,
	halt: OpenHalt,
	taskBefore: HaltState['taskId'],
	sample: RobotSample,
	rule: HaltRule
): Step {
	const faulty = isFaulty(sample);
	const silent = silentSince(state, sample, rule) !== null;
	if (!faulty && !silent) {
		const reason = excuse(sample);
		if (reason) return close(state, reason, sample.time);
		if (taskBefore !== undefined && taskBefore !== sample.taskId) return close(state, 'task_changed', sample.time);
		if (getsOn(state, rule)) return close(state, 'progress', sample.time);
	}
	const beneath = faulty
		? 'fault'
		: (state.kindBeneath ?? (silent ? null : (findStop(state, sample, rule)?.kind ?? null)));
	const kind = silent ? 'silent' : (beneath ?? halt.kind);
	const troubleAt = faulty || silent ? sample.time : state.troubleAt;
	const next = { ...state, kindBeneath: beneath, troubleAt, open: { ...halt, kind } };
	return { state: next, event: kind === halt.kind ? null : { type: 'changed', kind, at: sample.time } };
}

function open(
	state: HaltState,
	kind: HaltKind,
	onset: number,
	kindBeneath: HaltState['kindBeneath'],
	detectedAt: number
): Step {
	const stopped = kind !== 'fault' && kind !== 'silent' ? state.track : null;
	const farthest = stopped && bestProgress(stopped);
	const place = stopped && kind !== 'dither' ? newest(stopped) : null;
	const event = { type: 'started', kind, onset, detectedAt } as const;
	const troubleAt = kind === 'fault' || kind === 'silent' ? detectedAt : -Infinity;
	return { state: { ...state, open: { kind, onset, detectedAt }, kindBeneath, troubleAt, farthest, place }, event };
}

function close(state: HaltState, reason: HaltEnd, at: number): Step {
	// The next halt must not be dated back into this one.
	const track = state.track && startTrack(newest(state.track), state.track.remaining);
	const next = { ...state, open: null, kindBeneath: null, farthest: null, place: null, belowSince: null, track };
	return { state: next, event: { type: 'ended', at, reason } };
}

/** Takes the sample into the history; judges nothing. */
function observe(state: HaltState, sample: RobotSample, rule: HaltRule): HaltState {
	const keepS = rule.windowS + rule.holdS + rule.plannedYieldS + HISTORY_MARGIN_S;
	const track = follow(state, sample, rule, keepS);
	const progress = track && isFresh(sample, rule) ? progressInWindow(track, rule) : null;
	const below = progress !== null && progress < rule.minProgressM;
	return {
		...state,
		time: sample.time,
		firstTime: Math.min(state.firstTime, sample.time),
		taskId: sample.taskId,
		lostAt: sample.link === 'lost' ? (state.lostAt ?? sample.time) : null,
		track,
		belowSince: below ? (state.belowSince ?? sample.time) : null,
		people: notePeople(state.people, sample, rule, keepS + rule.beforeOnsetS)
	};
}

function follow(state: HaltState, sample: RobotSample, rule: HaltRule, keepS: number): ProgressTrack | null {
	const { pose, remaining } = sample;
	if (!pose || excuse(sample)) return null;
	// A pose from before the robot went on to this task or left a planned stop starts the window all the same: it stood there.
	const sameTask = state.taskId === sample.taskId;
	if (!state.track || !sameTask || newest(state.track).time > sample.time + rule.maxGapS) {
		return startTrack(
			{ x: pose.x, y: pose.y, time: Math.max(pose.time, Math.min(sample.time, state.time)) },
			remaining
		);
	}
	return extendTrack(state.track, pose, remaining, rule, keepS);
}

function notePeople(
	people: HaltState['people'],
	sample: RobotSample,
	rule: HaltRule,
	keepS: number
): HaltState['people'] {
	const close = sample.nearestPerson !== null && sample.nearestPerson <= rule.personNearM;
	const hemmed = sample.roomAlone !== null && sample.roomAlone < rule.goSpeed && sample.roomLimitedByPeople === true;
	const near = close || hemmed;
	const last = people[people.length - 1];
	if (last && sample.time - last.time < PEOPLE_SPACING_S - 1e-6) {
		return near && !last.near ? [...people.slice(0, -1), { time: last.time, near }] : people;
	}
	const from = people.findIndex((seen) => seen.time >= sample.time - keepS);
	return [...(from < 0 ? [] : people.slice(from)), { time: sample.time, near }];
}

/** A stop that has lasted long enough to be a halt. */
function findStop(
	state: HaltState,
	sample: RobotSample,
	rule: HaltRule
): { onset: number; kind: 'freeze' | 'stall' | 'dither' } | null {
	const { track, belowSince } = state;
	if (!track || belowSince === null || sample.time - belowSince < rule.holdS - 1e-6) return null;
	const onset = computeOnset(track, rule);
	if (sample.time - onset < rule.plannedYieldS) return null;
	if (pathWithin(track, rule.windowS) >= rule.ditherPathM) return { onset, kind: 'dither' };
	return { onset, kind: peopleBefore(state.people, onset, rule) ? 'freeze' : 'stall' };
}

/** Whether people were near in the seconds before onset; whoever walks up to a standing robot later did not stop it. */
function peopleBefore(people: HaltState['people'], onset: number, rule: HaltRule): boolean {
	const before = people.filter((seen) => seen.time >= onset - rule.beforeOnsetS - 1e-6 && seen.time <= onset + 1e-6);
	if (before.length > 0) return before.some((seen) => seen.near);
	return people.find((seen) => seen.time > onset)?.near ?? false;
}

/** m from where it stopped at which a robot has found another way; farther than one that backs off to try again goes. */
const LEFT_PLACE_M = 3;

/** Backing off and coming back to the same people gains metres too, so a stop ends beyond the farthest point, or elsewhere. */
function getsOn({ track, troubleAt, farthest, place }: HaltState, rule: HaltRule): boolean {
	if (!track) return false;
	const now = newest(track);
	const gained = progressWithin(track, Math.min(rule.endWindowS, now.time - troubleAt));
	if (gained < rule.endProgressM - 1e-9) return false;
	if (farthest === null || now.progress >= farthest + rule.minProgressM) return true;
	return place !== null && Math.hypot(now.x - place.x, now.y - place.y) >= LEFT_PLACE_M;
}

/** Why standing still is all right now; null when the robot should be getting on. */
function excuse(sample: RobotSample): HaltEnd | null {
	if (!sample.tasked) return 'task_ended';
	if (!sample.automatic) return 'manual';
	if (sample.charging) return 'charging';
	if (sample.paused) return 'paused';
	return sample.atWaitingPlace || sample.nearGoal ? 'planned' : null;
}

function isFaulty(sample: RobotSample): boolean {
	if (!sample.tasked) return false;
	return sample.estop || (sample.automatic && (!sample.localized || sample.blockingError !== null));
}

/** When a robot that ought to be heard fell silent, s; null while it is heard or need not be. */
function silentSince(state: HaltState, sample: RobotSample, rule: HaltRule): number | null {
	if (!sample.tasked || !sample.automatic || sample.charging) return null;
	const { pose, link, time } = sample;
	if (pose === null) {
		if (state.lostAt !== null) return state.lostAt;
		return link === 'online' && time - state.firstTime >= rule.silentAfterS ? state.firstTime : null;
	}
	// A last will that arrives late is contradicted by poses that go on.
	const after = link === 'lost' ? Math.min(rule.maxGapS, rule.silentAfterS) : rule.silentAfterS;
	return time - pose.time >= after - 1e-6 ? pose.time : null;
}

const isFresh = (sample: RobotSample, rule: HaltRule): boolean =>
	sample.pose !== null && sample.time - sample.pose.time <= rule.maxGapS;
