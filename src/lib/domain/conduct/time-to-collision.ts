/** When do two movers touch if both keep their velocity? */

import type { Point } from '../geometry/types.ts';

/**
 * Time to collision in s at constant velocities: 0 when the discs touch or overlap (also when they part), Infinity when they
 * never meet. The standard closed form, in the rearrangement that does not cancel.
 *
 * @param position of the other seen from oneself, m
 * @param velocity of the other relative to one's own, m/s
 * @param reach sum of the radii, m
 */
export function computeTimeToCollision(position: Point, velocity: Point, reach: number): number {
	const gap = position.x * position.x + position.y * position.y - reach * reach;
	if (gap <= 0) return 0;
	const square = velocity.x * velocity.x + velocity.y * velocity.y;
	const closing = position.x * velocity.x + position.y * velocity.y;
	if (square === 0 || closing >= 0) return Infinity;
	const discriminant = closing * closing - square * gap;
	if (discriminant < 0) return Infinity;
	return gap / (-closing + Math.sqrt(discriminant));
}
