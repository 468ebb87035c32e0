/** What the plan needs to know about a floor before anything moves on it. Metres in the floor frame. */

import type { Point, Polygon, Segment } from '../../domain/geometry/types.ts';

export interface PlanZone {
	readonly key: string;
	readonly name: string;
	readonly polygon: Polygon;
	/** persons/m²; null when nobody has set one */
	readonly threshold: number | null;
	readonly private: boolean;
}

export interface Plan {
	readonly key: string;
	readonly name: string;
	readonly walkable: Polygon;
	readonly walls: readonly Segment[];
	/** Names written on the drawing that are not zones */
	readonly labels: readonly (Point & { readonly text: string })[];
	readonly zones: readonly PlanZone[];
}

/** Size of a robot on the plan, by its model. */
export interface RobotShape {
	/** Key of the robot */
	readonly key: string;
	readonly mark: string;
	readonly model: string;
	readonly length: number;
	readonly width: number;
}
