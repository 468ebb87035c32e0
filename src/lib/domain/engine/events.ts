/** What a step of the engine reports beside the frame. Times in seconds. */

import type { HaltKind } from '../halts/halt-detector.ts';
import type { RejectionReason, RobotObservation } from './observation.ts';
import type { OpenHalt } from './robot-view.ts';

export type EngineEvent =
	| { readonly type: 'halt_started'; readonly floor: string; readonly halt: OpenHalt }
	| {
			readonly type: 'halt_changed';
			readonly floor: string;
			readonly halt: OpenHalt;
			readonly was: HaltKind;
			readonly at: number;
	  }
	| {
			readonly type: 'halt_ended';
			readonly floor: string;
			readonly halt: OpenHalt;
			readonly at: number;
			readonly reason: string;
	  }
	| {
			readonly type: 'rejected';
			readonly said: RobotObservation;
			readonly reason: RejectionReason;
			readonly detail: string;
			readonly at: number;
	  }
	| { readonly type: 'clock_stepped'; readonly robot: string; readonly offset: number; readonly at: number }
	| {
			readonly type: 'minutes';
			readonly floor: string;
			readonly density: readonly DensityMinute[];
			readonly exposure: readonly ExposureMinute[];
	  };

/** One zone's density over one minute. */
export interface DensityMinute {
	readonly zone: string;
	/** s since the epoch, start of the minute */
	readonly minute: number;
	/** persons/m², mean and largest of the results with enough coverage; null when there were none */
	readonly mean: number | null;
	readonly peak: number | null;
	/** Mean coverage over all results of the minute, 0…1 */
	readonly coverage: number;
	/** Observed area × time, m²·s */
	readonly observedAreaS: number;
	/** Persons on observed floor × time, person·s */
	readonly personS: number;
}

/** One robot's driving in one zone, minute and density band. */
export interface ExposureMinute {
	readonly robot: string;
	readonly zone: string | null;
	readonly minute: number;
	readonly band: string;
	/** s with a task and not halted */
	readonly taskedS: number;
	/** s of that with a speed above 0.05 m/s */
	readonly movingS: number;
	readonly distance: number;
	readonly halts: number;
}
