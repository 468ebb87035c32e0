/** The simulator's own record of when a robot truly made no progress and why. Never sent to the desk. */

import type { HaltKind } from '../../src/lib/contracts/live.ts';

/** A halt as it really was. Times are seconds since the start of the simulation. */
export interface TrueHalt {
	readonly robot: string;
	readonly floor: string;
	readonly kind: HaltKind;
	/** What stopped it, in the simulator's words. */
	readonly cause: string;
	readonly onset: number;
	/** When progress resumed or the task ended; null while it lasts */
	end: number | null;
	endedBy: 'progress' | 'task' | 'stop' | null;
	readonly x: number;
	readonly y: number;
	/** Persons within 2 m, centre to centre, at onset's notice */
	readonly personsWithin2m: number;
	/** m from centre to centre; null when nobody is within 5 m */
	readonly nearestPerson: number | null;
	/** Share of those within 2 m who would make way when asked; null when nobody is */
	readonly wouldYield: number | null;
}

export interface ProgressSample {
	readonly time: number;
	/** m still to go along the true shortest way; null without a task */
	readonly remaining: number | null;
	readonly taskId: string | null;
	/** False while standing still is part of the plan: paused, charging, waiting at a door, manual driving */
	readonly expected: boolean;
	readonly fault: string | null;
	readonly cause: string;
	/** m driven in total */
	readonly travelled: number;
}

export type HaltChange =
	| { readonly type: 'started'; readonly kind: HaltKind; readonly cause: string; readonly onset: number }
	| { readonly type: 'ended'; readonly at: number; readonly by: 'progress' | 'task' | 'stop' };

/** s without progress before standing still counts; shorter stops are ordinary yielding. */
const LEAST_HALT = 4;
/** m of progress that must fit into LEAST_HALT, else it is none: 0.05 m/s. */
const LEAST_PROGRESS = 0.2;
/** m of new progress that ends a halt */
const END_PROGRESS = 0.3;
/** m; within this of the best reached, the robot has stopped */
const AT_BEST = 0.05;

/** Follows one robot with perfect knowledge of the way left. */
export class HaltRecorder {
	#task: string | null = null;
	/** (time, remaining, travelled) since the last real progress. */
	#history: [number, number, number][] = [];
	#anchor = Infinity;
	#halted: { best: number; stuckAt: number; fault: boolean } | null = null;

	get halted(): boolean {
		return this.#halted !== null;
	}

	step({ time, remaining, taskId, expected, fault, cause, travelled }: ProgressSample): HaltChange | null {
		const halted = this.#halted;
		if (taskId !== this.#task || remaining === null || !expected) {
			const by = taskId !== this.#task || remaining === null ? 'task' : 'stop';
			this.#reset(taskId);
			return halted ? { type: 'ended', at: time, by } : null;
		}
		if (halted) return this.#watchForEnd(halted, time, remaining, fault);
		if (fault) {
			this.#halted = { best: remaining, stuckAt: time, fault: true };
			return { type: 'started', kind: 'fault', cause: fault, onset: time };
		}
		if (remaining <= this.#anchor - LEAST_PROGRESS || this.#history.length === 0) {
			this.#anchor = remaining;
			this.#history = [];
		}
		this.#history.push([time, remaining, travelled]);
		const [since] = this.#history[0]!;
		if (time - since < LEAST_HALT) return null;
		const best = Math.min(...this.#history.map(([, left]) => left));
		const [onset, , before] = this.#history.find(([, left]) => left <= best + AT_BEST)!;
		if (time - onset < LEAST_HALT) return null;
		this.#halted = { best, stuckAt: time, fault: false };
		const wandering = travelled - before > 1;
		const kind = wandering ? 'dither' : cause === 'people' ? 'freeze' : 'stall';
		return { type: 'started', kind, cause, onset };
	}

	#watchForEnd(
		halted: { best: number; stuckAt: number; fault: boolean },
		time: number,
		remaining: number,
		fault: string | null
	): HaltChange | null {
		if (fault || remaining > halted.best - AT_BEST) halted.stuckAt = time;
		if (fault || remaining > halted.best - END_PROGRESS) return null;
		const at = halted.stuckAt;
		this.#reset(this.#task);
		return { type: 'ended', at, by: 'progress' };
	}

	#reset(task: string | null): void {
		this.#task = task;
		this.#history = [];
		this.#anchor = Infinity;
		this.#halted = null;
	}
}
