/** The scripted situation `stuck`: a robot drives into a standing crowd that closes round it within seconds. */

import type { FloorWorld } from './core/floor-world.ts';
import type { Vehicle } from './robots/vehicle.ts';

/** Where it happens on the ground floor: open floor of the foyer, metres. */
const START = { x: 24, y: 18 };
const GOAL = { key: 'far-side', x: 52, y: 18 };
/** s after the start at which the crowd closes, and how long it stays. */
const CLOSES_AT = 5;
const STAYS = 90;

export class StuckScript {
	#closed = false;
	#sent = false;
	#opened = false;

	constructor(
		readonly vehicle: Vehicle,
		readonly floor: FloorWorld
	) {
		vehicle.errands.hold = true;
		vehicle.place(START.x, START.y, 0);
		const { life } = floor;
		// Two loose rings with a lane along the robot's way, 2 m and 3 m out from where it will be when they close.
		const centre = { x: START.x + 5.4, y: START.y };
		for (const [radius, count] of [
			[2, 10],
			[3, 14]
		] as const) {
			for (let k = 0; k < count; k++) {
				const angle = (2 * Math.PI * (k + 0.5)) / count;
				const [dx, dy] = [radius * Math.cos(angle), radius * Math.sin(angle)];
				if (Math.abs(dy) < 0.9 && dx < 0) continue;
				life.place(centre.x + dx, centre.y + dy, Infinity);
			}
		}
	}

	step(time: number): void {
		const { vehicle, floor } = this;
		if (!this.#sent) {
			this.#sent = vehicle.errands.assign(GOAL, vehicle.floor, time);
			return;
		}
		if (!this.#closed && time >= CLOSES_AT) {
			// The first robot of the fleet is the first on its floor.
			floor.life.gather(0, vehicle, 20, STAYS, 8);
			this.#closed = true;
		}
		if (!this.#opened && time > CLOSES_AT + STAYS + 30) {
			vehicle.errands.hold = false;
			this.#opened = true;
		}
	}
}
