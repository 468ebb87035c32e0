/** Which cells of the floor somebody's sensor saw, and when last. */

import { createStarTester, computeVisibleRing } from '../geometry/visibility.ts';
import { distanceToSegment, isInsideRing } from '../geometry/polygon.ts';
import type { Ring } from '../geometry/types.ts';
import type { FloorModel } from './floor-model.ts';

/** s since the epoch each cell was last seen; −Infinity never. Row by row from the lower left. */
export type SeenAt = Float64Array;

/** One look of one sensor, floor frame. */
export interface View {
	readonly x: number;
	readonly y: number;
	/** m */
	readonly range: number;
	/** Absolute angles, rad, counter-clockwise from → to; null all round */
	readonly fieldOfView: readonly [from: number, to: number] | null;
	readonly blocked: Ring | null;
	/** s */
	readonly time: number;
}

export const nothingSeen = (model: FloorModel): SeenAt =>
	new Float64Array(model.grid.cols * model.grid.rows).fill(-Infinity);

/** The cells after some more looks. Returns a new array; the one passed in is left alone. */
export function markSeen(model: FloorModel, seenAt: SeenAt, views: readonly View[]): SeenAt {
	if (views.length === 0) return seenAt;
	const next = seenAt.slice();
	for (const view of views) markOne(model, next, view);
	return next;
}

function markOne(model: FloorModel, seenAt: SeenAt, view: View): void {
	const { grid, sight, privateCell } = model;
	const { x, y, range, fieldOfView, blocked, time } = view;
	const ring = computeVisibleRing(sight, x, y, range, fieldOfView);
	const sees = createStarTester(ring, x, y);
	// Most cells are nearer than anything that ends the view, or beyond the range; only those between need a close look.
	const clear2 = fieldOfView === null ? clearDistance(ring, x, y) ** 2 * (1 - 1e-9) : 0;
	const range2 = range * range * (1 + 1e-9);
	const fromCol = Math.max(0, Math.floor((x - range - grid.x0) / grid.cell));
	const toCol = Math.min(grid.cols - 1, Math.floor((x + range - grid.x0) / grid.cell));
	const fromRow = Math.max(0, Math.floor((y - range - grid.y0) / grid.cell));
	const toRow = Math.min(grid.rows - 1, Math.floor((y + range - grid.y0) / grid.cell));
	for (let row = fromRow; row <= toRow; row++) {
		for (let index = row * grid.cols + fromCol, end = row * grid.cols + toCol; index <= end; index++) {
			if (grid.area[index] === 0 || privateCell[index] === 1 || seenAt[index]! >= time) continue;
			const cellX = grid.sampleX[index]!;
			const cellY = grid.sampleY[index]!;
			const away2 = (cellX - x) * (cellX - x) + (cellY - y) * (cellY - y);
			if (away2 > range2 || (away2 >= clear2 && !sees(cellX, cellY))) continue;
			if (blocked && isInsideRing(blocked, cellX, cellY)) continue;
			seenAt[index] = time;
		}
	}
}

/** m from a sensor that sees all round to the nearest place where its view ends; 0 when it sees nothing. */
function clearDistance(ring: Ring, x: number, y: number): number {
	let least = Infinity;
	for (let i = 0; i < ring.length; i++) {
		const [ax, ay] = ring[i]!;
		const [bx, by] = ring[(i + 1) % ring.length]!;
		least = Math.min(least, distanceToSegment(x, y, { ax, ay, bx, by }));
	}
	return least === Infinity ? 0 : least;
}

/** 1 for each cell seen within the window before `now`, else 0. */
export function observedMask(seenAt: SeenAt, now: number, windowS: number): Uint8Array {
	const mask = new Uint8Array(seenAt.length);
	for (let index = 0; index < mask.length; index++) if (now - seenAt[index]! <= windowS) mask[index] = 1;
	return mask;
}

/** Whether a point is in this view. A wall may be touched but not crossed. */
export function isInView(model: FloorModel, view: View, x: number, y: number): boolean {
	const dx = x - view.x;
	const dy = y - view.y;
	if (dx * dx + dy * dy > view.range * view.range) return false;
	if (view.fieldOfView && !isWithinAngles(Math.atan2(dy, dx), view.fieldOfView)) return false;
	if (view.blocked && isInsideRing(view.blocked, x, y)) return false;
	return !model.sight.isSightBlocked(view.x, view.y, x, y);
}

const TURN = 2 * Math.PI;

function isWithinAngles(angle: number, [from, to]: readonly [number, number]): boolean {
	const span = to - from;
	if (span >= TURN) return true;
	const width = ((span % TURN) + TURN) % TURN;
	return (((angle - from) % TURN) + TURN) % TURN <= width;
}
