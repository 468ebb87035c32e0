/** Keeps the true halts of a whole fleet, and says how full the floor truly is. For scoring and tests only. */

import type { FloorWorld } from '../core/floor-world.ts';
import type { Agent } from './agent.ts';
import { HaltRecorder, type TrueHalt } from './truth.ts';

/** s without radio before a tasked robot counts as silent */
const SILENT_AFTER = 3;

export class TruthKeeper {
	/** In the order they were noticed; a halt is added once it has lasted a few seconds. */
	readonly halts: TrueHalt[] = [];
	/** Robot-seconds under way: tasked, automatic, not standing by plan. */
	taskedSeconds = 0;
	readonly #recorders: HaltRecorder[];
	readonly #open: (TrueHalt | null)[];
	readonly #silent: (TrueHalt | null)[];
	readonly #quietSince: number[];
	#last = 0;

	constructor(
		readonly agents: readonly Agent[],
		readonly floors: readonly FloorWorld[]
	) {
		this.#recorders = agents.map(() => new HaltRecorder());
		this.#open = agents.map(() => null);
		this.#silent = agents.map(() => null);
		this.#quietSince = agents.map(() => -1);
	}

	step(time: number): void {
		for (let i = 0; i < this.agents.length; i++) {
			const { vehicle } = this.agents[i]!;
			if (vehicle.task && !vehicle.standsByPlan(time)) this.taskedSeconds += time - this.#last;
			const change = this.#recorders[i]!.step({
				time,
				remaining: vehicle.remaining(),
				taskId: vehicle.task?.id ?? null,
				expected: !vehicle.standsByPlan(time),
				fault: vehicle.faultNow(time),
				cause: vehicle.cause,
				travelled: vehicle.travelled
			});
			if (change?.type === 'started') this.#open[i] = this.#note(i, change.kind, change.cause, change.onset);
			else if (change?.type === 'ended' && this.#open[i]) {
				this.#open[i]!.end = change.at;
				this.#open[i]!.endedBy = change.by;
				this.#open[i] = null;
			}
			this.#watchRadio(i, time);
		}
		this.#last = time;
	}

	#watchRadio(i: number, time: number): void {
		const { radio, vehicle } = this.agents[i]!;
		const open = this.#silent[i];
		if (radio || !vehicle.task) {
			this.#quietSince[i] = -1;
			if (open) {
				open.end = time;
				open.endedBy = radio ? 'progress' : 'task';
				this.#silent[i] = null;
			}
			return;
		}
		if (this.#quietSince[i]! < 0) this.#quietSince[i] = time;
		if (!open && time - this.#quietSince[i]! >= SILENT_AFTER)
			this.#silent[i] = this.#note(i, 'silent', 'radio', this.#quietSince[i]!);
	}

	#note(i: number, kind: TrueHalt['kind'], cause: string, onset: number): TrueHalt {
		const { vehicle } = this.agents[i]!;
		const floor = this.floors[vehicle.floor]!;
		let near = 0;
		let yielding = 0;
		let nearest = Infinity;
		floor.people.near(vehicle.x, vehicle.y, 5, (slot, distance) => {
			nearest = Math.min(nearest, distance);
			if (distance > 2) return;
			near++;
			yielding += floor.people.yields[slot]!;
		});
		const halt: TrueHalt = {
			robot: vehicle.robot.key,
			floor: floor.model.floor.key,
			kind,
			cause,
			onset,
			end: null,
			endedBy: null,
			x: vehicle.x,
			y: vehicle.y,
			personsWithin2m: near,
			nearestPerson: nearest === Infinity ? null : nearest,
			wouldYield: near > 0 ? yielding / near : null
		};
		this.halts.push(halt);
		return halt;
	}
}
