/** The one place where metres of a floor become pixels. y points up on the floor and down on the screen. */

import type { Bounds, Point, Ring } from '../../domain/geometry/types.ts';

/** What a viewport of `width` × `height` px shows: the floor point in its middle and the scale. */
export interface View {
	readonly centre: Point;
	readonly pxPerM: number;
	readonly width: number;
	readonly height: number;
}

/** px kept free at each edge */
export interface Margins {
	readonly top: number;
	readonly right: number;
	readonly bottom: number;
	readonly left: number;
}

export const screenX = (view: View, x: number): number => view.width / 2 + (x - view.centre.x) * view.pxPerM;
export const screenY = (view: View, y: number): number => view.height / 2 - (y - view.centre.y) * view.pxPerM;

/** The point of the floor under a pixel. */
export const floorAt = (view: View, px: number, py: number): Point => ({
	x: view.centre.x + (px - view.width / 2) / view.pxPerM,
	y: view.centre.y - (py - view.height / 2) / view.pxPerM
});

/**
 * The view that shows all of `bounds` between the margins, as large as fits but never above `mostPxPerM`. Margins that
 * leave no room are ignored.
 */
export function fitView(
	bounds: Bounds,
	size: { readonly width: number; readonly height: number },
	margins: Margins,
	mostPxPerM: number
): View {
	const roomX = size.width - margins.left - margins.right;
	const roomY = size.height - margins.top - margins.bottom;
	const { top, right, bottom, left } = roomX > 0 && roomY > 0 ? margins : { top: 0, right: 0, bottom: 0, left: 0 };
	const scale = Math.min(
		(size.width - left - right) / Math.max(bounds.maxX - bounds.minX, 1e-3),
		(size.height - top - bottom) / Math.max(bounds.maxY - bounds.minY, 1e-3),
		mostPxPerM
	);
	const pxPerM = scale > 0 ? scale : 1;
	return {
		centre: {
			x: (bounds.minX + bounds.maxX) / 2 + (right - left) / 2 / pxPerM,
			y: (bounds.minY + bounds.maxY) / 2 - (bottom - top) / 2 / pxPerM
		},
		pxPerM,
		...size
	};
}

/** Whether a point of the floor is on the screen between the margins. */
export function isInSight(view: View, margins: Margins, x: number, y: number): boolean {
	const [px, py] = [screenX(view, x), screenY(view, y)];
	return px > margins.left && px < view.width - margins.right && py > margins.top && py < view.height - margins.bottom;
}

/** Smallest box around a ring; an empty ring has an empty box at the origin. */
export function boundsOf(ring: Ring): Bounds {
	if (ring.length === 0) return { minX: 0, minY: 0, maxX: 0, maxY: 0 };
	const xs = ring.map(([x]) => x);
	const ys = ring.map(([, y]) => y);
	return { minX: Math.min(...xs), minY: Math.min(...ys), maxX: Math.max(...xs), maxY: Math.max(...ys) };
}
