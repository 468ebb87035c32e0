/** What the engine has to know about a floor, its zones and the robots on it. Metres, seconds, m/s. */

import type { Polygon, Segment, Similarity } from './geometry/types.ts';
import type { LevelOfServiceScheme } from './density/level-of-service.ts';

export interface Zone {
	/** Stable name inside the floor, for example `hall-b`. */
	readonly key: string;
	readonly name: string;
	readonly polygon: Polygon;
	readonly scheme: LevelOfServiceScheme;
	/** persons/m² above which the zone counts as crowded for robots; null when nobody has set one. */
	readonly threshold: number | null;
	/** Nothing about people in a private zone is ever stored or shown. */
	readonly private: boolean;
}

export interface Floor {
	/** Unique among all floors, for example `saltmarsh-ground`. */
	readonly key: string;
	readonly name: string;
	/** Where people and robots can be: outer wall line with pillars and fixtures as holes. */
	readonly walkable: Polygon;
	/** Extra walls inside the walkable polygon; they stop robots and block sight. */
	readonly walls: readonly Segment[];
	/** False where a sensor looks over the edges of the walkable polygon (low barriers, ceiling sensors). */
	readonly edgesBlockSight: boolean;
	readonly zones: readonly Zone[];
	/** Places where a robot waits by plan (lift, door, dock): a stop within `radius` metres is not a halt. */
	readonly waitingPlaces: readonly { readonly x: number; readonly y: number; readonly radius: number }[];
	/** Robot map name → floor frame. A robot may use any of the maps listed for its floor. */
	readonly maps: Readonly<Record<string, Similarity>>;
}

export interface RobotModel {
	readonly key: string;
	readonly name: string;
	/** One letter, first part of the robot's mark on the plan. */
	readonly letter: string;
	/** Footprint, metres; the disc used for room to move has radius `radius`. */
	readonly length: number;
	readonly width: number;
	readonly radius: number;
	/** m/s */
	readonly maxSpeed: number;
}

export interface Robot {
	/** Topic name, unique in the venue, for example `porter-07`. */
	readonly key: string;
	/** Two-part mark on the plan, for example `P7`. */
	readonly mark: string;
	readonly model: RobotModel;
}
