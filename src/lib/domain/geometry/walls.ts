/** Straight walls, found by place: what blocks a line of sight, and what is near a point. */

import Flatbush from 'flatbush';
import { distanceToSegment } from './polygon.ts';
import type { Segment } from './types.ts';

/** m; a line of sight passing a wall's end this closely grazes it. Chosen by us, far above rounding. */
const GRAZE = 1e-9;

export interface WallIndex {
	readonly segments: readonly Segment[];
	/**
	 * Whether a wall crosses the straight line from (ax, ay) to (bx, by).
	 * A wall that only touches either end of the line does not block, nor does one along the line, nor one whose end
	 * is grazed from one side. Passing exactly through the joint of two walls that lie on opposite sides does block.
	 */
	isSightBlocked(ax: number, ay: number, bx: number, by: number): boolean;
	/** Walls with a point within `radius` metres of (x, y), in no particular order. */
	near(x: number, y: number, radius: number): Segment[];
}

/** Index over walls in metres; an empty list blocks nothing. The list is kept, not copied. */
export function createWallIndex(segments: readonly Segment[]): WallIndex {
	const tree = treeOf(segments);
	if (!tree) return { segments, isSightBlocked: () => false, near: () => [] };
	return {
		segments,
		isSightBlocked(ax, ay, bx, by) {
			let left = false;
			let right = false;
			let blocked = false;
			const look = (index: number): boolean => {
				if (blocked) return false;
				const side = crossing(segments[index]!, ax, ay, bx, by);
				if (side === 'left') left = true;
				else if (side === 'right') right = true;
				else if (side === 'across') blocked = true;
				return false;
			};
			tree.search(
				Math.min(ax, bx) - GRAZE,
				Math.min(ay, by) - GRAZE,
				Math.max(ax, bx) + GRAZE,
				Math.max(ay, by) + GRAZE,
				look
			);
			return blocked || (left && right);
		},
		near(x, y, radius) {
			const found: Segment[] = [];
			tree.search(x - radius, y - radius, x + radius, y + radius, (index) => {
				const segment = segments[index]!;
				if (distanceToSegment(x, y, segment) <= radius) found.push(segment);
				return false;
			});
			return found;
		}
	};
}

/** The tree refuses to hold nothing, so no walls have no tree. */
function treeOf(segments: readonly Segment[]): Flatbush | null {
	if (segments.length === 0) return null;
	const tree = new Flatbush(segments.length);
	for (const { ax, ay, bx, by } of segments) {
		tree.add(Math.min(ax, bx), Math.min(ay, by), Math.max(ax, bx), Math.max(ay, by));
	}
	tree.finish();
	return tree;
}

/** How a wall meets the open line from a to b: across it, touching it from the left or right, or not at all. */
function crossing(wall: Segment, ax: number, ay: number, bx: number, by: number): 'across' | 'left' | 'right' | null {
	const dx = bx - ax;
	const dy = by - ay;
	const length = Math.hypot(dx, dy);
	if (length <= GRAZE) return null;
	// Signed distances of the wall's ends from the line, m; positive on its left.
	const p = (dx * (wall.ay - ay) - dy * (wall.ax - ax)) / length;
	const q = (dx * (wall.by - ay) - dy * (wall.bx - ax)) / length;
	const pOn = Math.abs(p) <= GRAZE;
	const qOn = Math.abs(q) <= GRAZE;
	if ((pOn && qOn) || (!pOn && !qOn && p > 0 === q > 0)) return null;
	const share = pOn ? 0 : qOn ? 1 : p / (p - q);
	const x = wall.ax + share * (wall.bx - wall.ax);
	const y = wall.ay + share * (wall.by - wall.ay);
	const along = ((x - ax) * dx + (y - ay) * dy) / length;
	if (along <= GRAZE || along >= length - GRAZE) return null;
	if (!pOn && !qOn) return 'across';
	return (pOn ? q : p) > 0 ? 'left' : 'right';
}
