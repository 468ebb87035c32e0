/** Where each robot was in the last 20 s. Pure, time is passed in. */

import { JUMP_M } from './motion.ts';

/** ms until a trail has faded. */
export const TRAIL_MS = 20_000;
/** m between two points of a trail. */
const STEP_M = 0.4;

export interface TrailPoint {
	readonly x: number;
	readonly y: number;
	readonly ms: number;
}

/** Trails by robot key; `note` appends, and drops what has faded. */
export class Trails {
	readonly #points = new Map<string, TrailPoint[]>();

	note(key: string, x: number, y: number, nowMs: number): void {
		let trail = this.#points.get(key);
		if (!trail) this.#points.set(key, (trail = []));
		const last = trail.at(-1);
		const step = last ? Math.hypot(x - last.x, y - last.y) : Infinity;
		if (last && step > JUMP_M) trail.length = 0;
		if (step >= STEP_M) trail.push({ x, y, ms: nowMs });
		while (trail[0] && nowMs - trail[0].ms > TRAIL_MS) trail.shift();
	}

	/** Oldest point first; empty for a robot that has not moved. */
	of(key: string): readonly TrailPoint[] {
		return this.#points.get(key) ?? [];
	}
}
