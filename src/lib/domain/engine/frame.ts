/** The engine's picture of one floor at one moment. */

import type { Level } from '../density/level-of-service.ts';
import type { Flexibility } from '../room/flexibility.ts';
import type { FloorPose, Moment, OpenHalt, RobotView } from './robot-view.ts';

export interface ZoneResult {
	readonly key: string;
	/** persons/m² by Voronoi cells with cut-off; null below the least coverage */
	readonly density: number | null;
	/** persons/m²; null below the least coverage */
	readonly classic: number | null;
	readonly coverage: number;
	/** m² */
	readonly observedArea: number;
	/** Persons on observed floor in the zone */
	readonly persons: number;
	readonly level: Level | null;
	readonly aboveThreshold: boolean;
}

export interface FieldResult {
	readonly time: number;
	/** persons/m² per cell, NaN where nobody looked */
	readonly values: Float32Array;
}

export interface PersonPoint {
	readonly id: number;
	readonly x: number;
	readonly y: number;
	readonly vx: number;
	readonly vy: number;
	readonly seenBy: number;
	/** s since anybody last saw this person */
	readonly age: number;
}

export type Condition =
	'working' | 'idle' | 'waiting' | 'paused' | 'charging' | 'manual' | 'halted' | 'fault' | 'silent';

export interface RobotPicture {
	readonly view: RobotView;
	readonly pose: FloorPose | null;
	readonly condition: Condition;
	readonly zone: string | null;
	readonly moment: Moment | null;
}

export interface Frame {
	readonly floor: string;
	readonly time: number;
	readonly robots: readonly RobotPicture[];
	readonly persons: readonly PersonPoint[];
	readonly zones: readonly ZoneResult[];
	readonly halts: readonly OpenHalt[];
	readonly observedArea: number;
	readonly coverage: number;
	readonly field: FieldResult | null;
	/** What room shared was computed with */
	readonly flexibility: Flexibility;
}
