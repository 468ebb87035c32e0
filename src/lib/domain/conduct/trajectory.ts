/**
 * How did a robot get along on one trip? Path, time, standing and turning. Several papers use one name for different
 * quantities; each result says which definition it follows, so print the definition with the number.
 */

import type { Point } from '../geometry/types.ts';
import { computeNearerThan, type TimedPoint } from './movement.ts';

export interface TripOptions {
	readonly goal: Point;
	/** m */
	readonly goalRadius: number;
	/** m, shortest walkable route from start to goal, > 0 */
	readonly referenceLength: number;
	/** m/s */
	readonly preferredSpeed: number;
	/** m/s below which the robot stands */
	readonly stallSpeed: number;
	/** s a stand must last to be an episode */
	readonly stallMinDuration: number;
	/** m; shorter steps have no heading, so that standing jitter adds no turning */
	readonly minStep: number;
	/** rad, heading before the first step; without it there is no path irregularity */
	readonly initialHeading?: number | undefined;
	/** s, times at a goal, dock or lift or under an operator's command: standing there is not stalling */
	readonly plannedStops?: readonly (readonly [from: number, to: number])[];
}

export interface TripMetrics {
	/** m, Σ‖Δp‖ (Pérez-Higueras et al. 2018) */
	readonly pathLength: number;
	/** m, start to end */
	readonly displacement: number;
	/** Path length / reference length; at least 1 only for completed trips (Biswas et al. 2021; Tsoi et al. 2022). null when the reference is not positive */
	readonly pathLengthRatio: number | null;
	/** Its inverse; null for a path of no length */
	readonly pathEfficiency: number | null;
	/** m, path length − reference length */
	readonly detour: number;
	/** Whether the goal radius was entered */
	readonly success: boolean;
	/** s to the first entry into the goal radius; null when never (Francis et al. 2023) */
	readonly timeToGoal: number | null;
	/** s, reference length / preferred speed */
	readonly idealTime: number;
	/** Time to goal / ideal time (our ratio) */
	readonly timeToGoalRatio: number | null;
	/** Success weighted by path length, 0…1; 0 without success (Anderson et al. 2018, from memory) */
	readonly successByPathLength: number;
	/** m/s, length over time: not the mean of the steps' speeds; null without duration */
	readonly meanSpeed: number | null;
	/** s with the step's speed below `stallSpeed`, planned stops left out (Francis et al. 2023) */
	readonly stalledTime: number;
	/** s, contiguous stalls of at least `stallMinDuration` */
	readonly stallEpisodes: readonly (readonly [from: number, to: number])[];
	/** rad, Σ|Δheading| (Pérez-Higueras et al. 2018) */
	readonly headingChange: number;
	/** rad, ΣΔheading; left and right cancel */
	readonly signedHeadingChange: number;
	/** rad/m, (rotation made − least rotation for the direct path) / length (Guzzi et al. 2013) */
	readonly pathIrregularity: number | null;
	/** rad, mean angle between step and goal direction, another published "path irregularity" (Biswas et al. 2021, from memory) */
	readonly meanGoalHeadingError: number | null;
}

interface Step {
	readonly from: TimedPoint;
	readonly to: TimedPoint;
	readonly length: number;
	readonly seconds: number;
}

/** Metrics of one path, samples in order of time. With fewer than two samples there is no movement and no success. */
export function computeTrip(path: readonly TimedPoint[], options: TripOptions): TripMetrics {
	const steps = path.slice(1).map((to, i): Step => {
		const from = path[i]!;
		return { from, to, length: Math.hypot(to.x - from.x, to.y - from.y), seconds: to.time - from.time };
	});
	const [first, last] = [path[0], path[path.length - 1]];
	const pathLength = sum(steps.map(({ length }) => length));
	const duration = sum(steps.map(({ seconds }) => seconds));
	const { referenceLength } = options;
	const timeToGoal = findTimeToGoal(steps, options);
	const idealTime = referenceLength / options.preferredSpeed;
	const stalls = findStalls(steps, options);
	return {
		pathLength,
		displacement: first && last ? Math.hypot(last.x - first.x, last.y - first.y) : 0,
		pathLengthRatio: referenceLength > 0 ? pathLength / referenceLength : null,
		pathEfficiency: pathLength > 0 ? referenceLength / pathLength : null,
		detour: pathLength - referenceLength,
		success: timeToGoal !== null,
		timeToGoal,
		idealTime,
		timeToGoalRatio: timeToGoal !== null && idealTime > 0 ? timeToGoal / idealTime : null,
		successByPathLength: timeToGoal === null ? 0 : weighByLength(pathLength, referenceLength),
		meanSpeed: duration > 0 ? pathLength / duration : null,
		...stalls,
		...computeTurning(steps, pathLength, options)
	};
}

/**
 * Mean of the ratios over trips. Unfinished trips are counted, not averaged: a robot that gives up early has a short path.
 * Means are null when no trip was completed.
 */
export function summariseTrips(trips: readonly TripMetrics[]): {
	trips: number;
	completed: number;
	meanPathLengthRatio: number | null;
	meanTimeToGoalRatio: number | null;
} {
	const completed = trips.filter(({ success }) => success);
	return {
		trips: trips.length,
		completed: completed.length,
		meanPathLengthRatio: mean(completed.flatMap(({ pathLengthRatio }) => pathLengthRatio ?? [])),
		meanTimeToGoalRatio: mean(completed.flatMap(({ timeToGoalRatio }) => timeToGoalRatio ?? []))
	};
}

function findTimeToGoal(steps: readonly Step[], { goal, goalRadius }: TripOptions): number | null {
	for (const { from, to, seconds } of steps) {
		const seenFromGoal = ({ x, y }: Point) => ({ x: x - goal.x, y: y - goal.y });
		const near = computeNearerThan(seenFromGoal(from), seenFromGoal(to), goalRadius);
		if (near) return from.time + near[0] * seconds - steps[0]!.from.time;
	}
	return null;
}

function weighByLength(length: number, reference: number): number {
	const longer = Math.max(length, reference);
	return longer > 0 ? reference / longer : 1;
}

function findStalls(
	steps: readonly Step[],
	{ stallSpeed, stallMinDuration, plannedStops = [] }: TripOptions
): Pick<TripMetrics, 'stalledTime' | 'stallEpisodes'> {
	const runs: [from: number, to: number][] = [];
	let stalledTime = 0;
	let running = false;
	for (const { from, to, length, seconds } of steps) {
		const middle = (from.time + to.time) / 2;
		const planned = plannedStops.some(([start, end]) => middle >= start && middle < end);
		const stalled = !planned && seconds > 0 && length / seconds < stallSpeed;
		if (stalled) {
			stalledTime += seconds;
			if (running) runs[runs.length - 1]![1] = to.time;
			else runs.push([from.time, to.time]);
		}
		running = stalled;
	}
	return { stalledTime, stallEpisodes: runs.filter(([from, to]) => to - from >= stallMinDuration - 1e-12) };
}

function computeTurning(
	steps: readonly Step[],
	pathLength: number,
	{ goal, minStep, initialHeading }: TripOptions
): Pick<TripMetrics, 'headingChange' | 'signedHeadingChange' | 'pathIrregularity' | 'meanGoalHeadingError'> {
	const headed = steps.filter(({ length }) => length >= minStep);
	const headings = headed.map(({ from, to }) => Math.atan2(to.y - from.y, to.x - from.x));
	const turns = headings.slice(1).map((heading, i) => turn(headings[i]!, heading));
	const headingChange = sum(turns.map(Math.abs));

	let pathIrregularity: number | null = null;
	const [start, firstHeading] = [steps[0]?.from, headings[0]];
	if (initialHeading !== undefined && start && firstHeading !== undefined) {
		const made = Math.abs(turn(initialHeading, firstHeading)) + headingChange;
		const least = Math.abs(turn(initialHeading, Math.atan2(goal.y - start.y, goal.x - start.x)));
		pathIrregularity = pathLength > 0 ? Math.max(0, made - least) / pathLength : null;
	}
	const errors = headed.flatMap(({ from }, i) => {
		const toGoal = { x: goal.x - from.x, y: goal.y - from.y };
		if (Math.hypot(toGoal.x, toGoal.y) === 0) return [];
		return Math.abs(turn(Math.atan2(toGoal.y, toGoal.x), headings[i]!));
	});
	return { headingChange, signedHeadingChange: sum(turns), pathIrregularity, meanGoalHeadingError: mean(errors) };
}

/** Turn from one heading to another, rad; an about-turn keeps the sign of the plain difference. */
const turn = (from: number, to: number): number => Math.atan2(Math.sin(to - from), Math.cos(to - from));
const sum = (values: readonly number[]): number => values.reduce((total, value) => total + value, 0);
const mean = (values: readonly number[]): number | null => (values.length > 0 ? sum(values) / values.length : null);
