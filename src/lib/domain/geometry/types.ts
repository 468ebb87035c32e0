/** Shapes every part of the domain shares. Metres in the floor frame, x right, y up, angles counter-clockwise from +x. */

export interface Point {
	readonly x: number;
	readonly y: number;
}

/** Corner list of a closed ring, metres; the first corner is not repeated at the end; either direction. */
export type Ring = readonly (readonly [x: number, y: number])[];

/** One simple polygon with holes, metres. */
export interface Polygon {
	readonly outer: Ring;
	readonly holes: readonly Ring[];
}

/** A set of disjoint polygons, metres. An empty list is an empty area. */
export type Area = readonly Polygon[];

/** A straight wall, metres. */
export interface Segment {
	readonly ax: number;
	readonly ay: number;
	readonly bx: number;
	readonly by: number;
}

/** Axis-aligned bounds, metres. */
export interface Bounds {
	readonly minX: number;
	readonly minY: number;
	readonly maxX: number;
	readonly maxY: number;
}

/**
 * Similarity from one frame to another: `p' = scale · R(rotation) · p + (tx, ty)`.
 * scale > 0 (1 between two metric frames), rotation in rad, tx and ty in the target frame's unit.
 */
export interface Similarity {
	readonly scale: number;
	readonly rotation: number;
	readonly tx: number;
	readonly ty: number;
}
