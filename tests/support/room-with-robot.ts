/** A small invented floor, one robot and the observations it would send: for tests of the engine. */

import type { PeopleObservation, PoseObservation, StateObservation } from '../../src/lib/domain/engine/observation.ts';
import type { Floor, Robot, RobotModel } from '../../src/lib/domain/floor.ts';
import { IDENTITY } from '../../src/lib/domain/geometry/similarity.ts';

const rectangle = (x0: number, y0: number, x1: number, y1: number) => ({
	outer: [
		[x0, y0],
		[x1, y0],
		[x1, y1],
		[x0, y1]
	] as const,
	holes: []
});

export const MODEL: RobotModel = {
	key: 'trolley',
	name: 'Trolley',
	letter: 'T',
	length: 0.8,
	width: 0.6,
	radius: 0.4,
	maxSpeed: 1.2
};

export const robotNamed = (key: string): Robot => ({ key, mark: key.toUpperCase(), model: MODEL });

export const FLOOR: Floor = {
	key: 'test-floor',
	name: 'Test floor',
	walkable: rectangle(0, 0, 20, 10),
	walls: [],
	edgesBlockSight: true,
	zones: [
		{
			key: 'west',
			name: 'West',
			polygon: rectangle(0, 0, 10, 10),
			scheme: 'fruin_walkway',
			threshold: 0.5,
			private: false
		},
		{
			key: 'east',
			name: 'East',
			polygon: rectangle(10, 0, 20, 10),
			scheme: 'fruin_walkway',
			threshold: null,
			private: false
		}
	],
	waitingPlaces: [],
	maps: { 'test-map': IDENTITY }
};

export const T0 = 1_800_000_000;

interface At {
	readonly robot?: string;
	readonly t: number;
	/** s the message takes */
	readonly delay?: number;
	/** s the robot's clock is ahead */
	readonly ahead?: number;
}

const said = ({ robot = 't1', t, delay = 0.02, ahead = 0 }: At) => ({
	robot,
	receivedAt: t + delay,
	robotTime: t + ahead,
	retained: false
});

export const pose = (
	at: At & { x: number; y: number; heading?: number; speed?: number; map?: string }
): PoseObservation => ({
	kind: 'pose',
	...said(at),
	map: at.map ?? 'test-map',
	x: at.x,
	y: at.y,
	heading: at.heading ?? 0,
	speed: at.speed ?? 0
});

export const people = (
	at: At & {
		persons: readonly (readonly [x: number, y: number])[];
		range?: number;
		sd?: number;
		fov?: readonly [number, number];
	}
): PeopleObservation => ({
	kind: 'people',
	...said(at),
	map: 'test-map',
	range: at.range ?? 40,
	fieldOfView: at.fov ?? null,
	blocked: null,
	persons: at.persons.map(([x, y], index) => ({ id: `p${index}`, x, y, vx: null, vy: null, sd: at.sd ?? 0.05 }))
});

export const state = (at: At & Partial<StateObservation> & { goal?: { x: number; y: number } }): StateObservation => ({
	kind: 'state',
	...said(at),
	tasked: at.tasked ?? true,
	task: at.tasked === false ? null : { id: 'job-1', goal: at.goal ?? { x: 19, y: 5 }, route: null },
	mode: at.mode ?? 'automatic',
	paused: at.paused ?? false,
	estop: at.estop ?? false,
	charging: at.charging ?? false,
	battery: 0.8,
	localized: at.localized ?? true,
	errors: at.errors ?? [],
	software: '1.0.0'
});
