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
/** m; a halt has ended where the last bit of this new progress began, so that creeping before it is not counted as going */
const LAST_BIT = 0.25;
/** s of history kept */
const KEPT = 12;

interface Step {
	readonly time: number;
	readonly remaining: number;
	/** Least way left so far on this task: backing off and coming back is no progress */
	readonly best: number;
	readonly travelled: number;
}

/** Follows one robot with perfect knowledge of the way left. */
export class HaltRecorder {
	#task: string | null = null;
	#history: Step[] = [];
	#halted: { readonly best: number } | null = null;

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
		const best = Math.min(remaining, this.#history.at(-1)?.best ?? Infinity);
		this.#history.push({ time, remaining, best, travelled });
		if (time - this.#history[0]!.time > KEPT) this.#history.shift();
		if (halted) return this.#watchForEnd(halted.best, remaining, fault);
		if (fault) {
			this.#halted = { best };
			return { type: 'started', kind: 'fault', cause: fault, onset: time };
		}
		const before = this.#history.findLast((step) => time - step.time >= LEAST_HALT - 1e-6);
		if (!before || before.best - best >= LEAST_PROGRESS) return null;
		const from = this.#lastGoing();
		if (time - from.time < LEAST_HALT - 1e-6) return null;
		this.#halted = { best };
		const kind = travelled - from.travelled > 1 ? 'dither' : cause === 'people' ? 'freeze' : 'stall';
		return { type: 'started', kind, cause, onset: from.time };
	}

	/** The step after which it got on at less than the least rate: where best progress leads that rate most. */
	#lastGoing(): Step {
		const lead = ({ time, best }: Step) => -best - (LEAST_PROGRESS / LEAST_HALT) * time;
		return this.#history.reduce((found, step) => (lead(step) > lead(found) + 1e-9 ? step : found));
	}

	#watchForEnd(best: number, remaining: number, fault: string | null): HaltChange | null {
		if (fault || remaining > best - END_PROGRESS) return null;
		const at = (this.#history.findLast((step) => step.remaining >= remaining + LAST_BIT) ?? this.#history[0]!).time;
		this.#reset(this.#task);
		return { type: 'ended', at, by: 'progress' };
	}

	#reset(task: string | null): void {
		this.#task = task;
		this.#history = [];
		this.#halted = null;
	}
}
