/** Things that go wrong with robots, each behind a named rate. Rates are per robot-hour of driving; 0 switches a fault off. */

import type { Random } from '../core/random.ts';

export interface FaultRates {
	/** People gather round the robot and stay about a minute */
	readonly onlookers: number;
	/** Something is put down right in front of it */
	readonly obstruction: number;
	/** It no longer knows where it is */
	readonly localization: number;
	/** Somebody presses its stop button */
	readonly estop: number;
	/** It reports a critical error of its own */
	readonly breakdown: number;
	/** Somebody takes over by hand; a planned stop, not a halt */
	readonly manual: number;
	/** No radio for a while */
	readonly silence: number;
	/** Its software restarts: sequence numbers and person ids begin again */
	readonly restart: number;
}

export type FaultName = keyof FaultRates;

export const NO_FAULTS: FaultRates = {
	onlookers: 0,
	obstruction: 0,
	localization: 0,
	estop: 0,
	breakdown: 0,
	manual: 0,
	silence: 0,
	restart: 0
};

/** s each lasts: least and most. Chosen by us. */
const DURATION: Record<FaultName, readonly [number, number]> = {
	onlookers: [30, 75],
	obstruction: [25, 80],
	localization: [15, 50],
	estop: [20, 70],
	breakdown: [30, 90],
	manual: [20, 60],
	silence: [15, 60],
	restart: [3, 8]
};

const NAMES = Object.keys(NO_FAULTS) as FaultName[];

export class Faults {
	readonly #until: Record<FaultName, number>;

	constructor(
		readonly rates: FaultRates,
		readonly random: Random
	) {
		this.#until = { ...NO_FAULTS };
	}

	isActive(name: FaultName, time: number): boolean {
		return time < this.#until[name];
	}

	/** Starts one by hand, as scripted scenarios do. */
	start(name: FaultName, time: number, seconds: number): void {
		this.#until[name] = time + seconds;
	}

	/** Draws what begins in the next dt seconds; only one thing goes wrong at a time. */
	draw(dt: number, time: number): { name: FaultName; seconds: number } | null {
		if (NAMES.some((name) => time < this.#until[name])) return null;
		for (const name of NAMES) {
			if (this.rates[name] === 0 || !this.random.chance((this.rates[name] / 3600) * dt)) continue;
			const [least, most] = DURATION[name];
			const seconds = this.random.between(least, most);
			this.start(name, time, seconds);
			return { name, seconds };
		}
		return null;
	}
}
