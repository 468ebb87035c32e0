/** What the simulation knows about a venue beyond the floors the desk knows: where people go and what robots are sent to. */

import type { Floor, Robot, RobotModel } from '../../src/lib/domain/floor.ts';
import type { Point, Segment } from '../../src/lib/domain/geometry/types.ts';

export interface Venue {
	readonly key: string;
	readonly name: string;
	readonly town: string;
	/** IANA zone */
	readonly timeZone: string;
}

export type PlaceKind = 'entrance' | 'stand' | 'audience' | 'counter' | 'table' | 'lift' | 'lounge';

/** A part of the floor people go to. Rectangles, metres. */
export interface Place {
	readonly key: string;
	readonly kind: PlaceKind;
	readonly minX: number;
	readonly minY: number;
	readonly maxX: number;
	readonly maxY: number;
	/** Queue before a counter: head first. Only for `counter` and `lift`. */
	readonly queue?: readonly Point[];
	/** s one person takes at the head of the queue, mean. */
	readonly service?: number;
}

export interface RobotGoal {
	readonly key: string;
	readonly x: number;
	readonly y: number;
}

export interface VenueFloor {
	readonly floor: Floor;
	readonly places: readonly Place[];
	/** Places robots are sent to. */
	readonly goals: readonly RobotGoal[];
	readonly docks: readonly RobotGoal[];
	/** Doors a robot waits at, and the door of the lift. */
	readonly doors: readonly RobotGoal[];
	readonly lift: RobotGoal | null;
}

export type Planner = 'decoupled' | 'counting';

/** A robot of the demo fleet, with what the desk is not told. */
export interface FleetRobot extends Robot {
	/** Index into the venue's floors. */
	readonly floor: number;
	/** Name of its map there; the same model has one map per floor. */
	readonly maps: readonly string[];
	readonly planner: Planner;
	readonly software: string;
}

export interface VenueModel {
	readonly venue: Venue;
	readonly floors: readonly VenueFloor[];
	readonly models: readonly RobotModel[];
}

export const rect = (minX: number, minY: number, maxX: number, maxY: number): [number, number][] => [
	[minX, minY],
	[maxX, minY],
	[maxX, maxY],
	[minX, maxY]
];

/** A straight wall along x (y fixed) with openings; each opening is [from, to] along x. */
export function wallAlongX(y: number, from: number, to: number, openings: readonly [number, number][] = []): Segment[] {
	return pieces(from, to, openings).map(([a, b]) => ({ ax: a, ay: y, bx: b, by: y }));
}

/** A straight wall along y (x fixed) with openings; each opening is [from, to] along y. */
export function wallAlongY(x: number, from: number, to: number, openings: readonly [number, number][] = []): Segment[] {
	return pieces(from, to, openings).map(([a, b]) => ({ ax: x, ay: a, bx: x, by: b }));
}

function pieces(from: number, to: number, openings: readonly [number, number][]): [number, number][] {
	const cuts = [from, ...openings.flat(), to];
	const kept: [number, number][] = [];
	for (let i = 0; i < cuts.length; i += 2) if (cuts[i + 1]! > cuts[i]!) kept.push([cuts[i]!, cuts[i + 1]!]);
	return kept;
}
