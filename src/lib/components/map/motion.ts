/** Where things are drawn between two frames: gliding from where they were seen to where they are. Pure, time is passed in. */

import { wrapAngle } from '../../domain/units.ts';

export interface Placed {
	x: number;
	y: number;
	/** rad; NaN when unknown */
	heading: number;
}

interface Glide {
	from: Placed;
	to: Placed;
	startMs: number;
	endMs: number;
}

/** m; a longer jump between two frames is a correction of position, not motion, and is not drawn as one. Chosen by us. */
export const JUMP_M = 3;
/** Bounds on one glide, ms: frames come a few times a second. */
const SHORTEST_MS = 50;
const LONGEST_MS = 600;

export class Motion<Key> {
	readonly #glides = new Map<Key, Glide>();
	#lastFrameMs = NaN;
	#intervalMs = 250;

	/** @param still draws every thing at its last position at once (reduced motion) */
	constructor(private readonly still: () => boolean = () => false) {}

	/**
	 * Takes the positions of one frame, received at `nowMs`; what is not in it is forgotten. A glide lasts as long as
	 * frames are apart on average, so that a thing arrives when the next frame does.
	 */
	update(nowMs: number, things: Iterable<readonly [Key, Placed]>): void {
		const gap = nowMs - this.#lastFrameMs;
		if (gap > 0 && gap < 2000) this.#intervalMs += 0.2 * (gap - this.#intervalMs);
		this.#lastFrameMs = nowMs;
		const duration = Math.min(LONGEST_MS, Math.max(SHORTEST_MS, this.#intervalMs));
		const seen = new Set<Key>();
		for (const [key, to] of things) {
			seen.add(key);
			const from = this.at(key, nowMs);
			const glides = from && !this.still() && Math.hypot(to.x - from.x, to.y - from.y) < JUMP_M;
			this.#glides.set(key, { from: glides ? from : to, to, startMs: nowMs, endMs: nowMs + (glides ? duration : 0) });
		}
		for (const key of this.#glides.keys()) if (!seen.has(key)) this.#glides.delete(key);
	}

	/** Position to draw at `nowMs`; null for what is not on the floor. Never beyond the last known position. */
	at(key: Key, nowMs: number): Placed | null {
		const glide = this.#glides.get(key);
		if (!glide) return null;
		const { from, to, startMs, endMs } = glide;
		if (nowMs >= endMs) return to;
		const t = Math.max(0, (nowMs - startMs) / (endMs - startMs));
		const turn = wrapAngle(to.heading - from.heading);
		return {
			x: from.x + (to.x - from.x) * t,
			y: from.y + (to.y - from.y) * t,
			heading: Number.isNaN(turn) ? to.heading : from.heading + turn * t
		};
	}

	/** Whether anything still glides at `nowMs`. */
	moves(nowMs: number): boolean {
		return nowMs < this.#lastFrameMs + LONGEST_MS;
	}
}
