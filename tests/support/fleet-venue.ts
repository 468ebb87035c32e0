/** A small invented venue for tests of the simulation: one hall with two rooms, doors of 3 m, and a few places. */

import { rect, wallAlongY, type FleetRobot, type VenueModel } from '../../simulators/venue/model.ts';
import type { Floor, RobotModel } from '../../src/lib/domain/floor.ts';
import { CLEAN_LINK } from '../../simulators/transport/link.ts';
import { NO_FAULTS } from '../../simulators/robots/faults.ts';
import { scenarioOf, type Scenario } from '../../simulators/scenarios.ts';

export const SMALL_MODEL: RobotModel = {
	key: 'cart',
	name: 'Cart',
	letter: 'C',
	length: 0.8,
	width: 0.6,
	radius: 0.4,
	maxSpeed: 1
};

export const SMALL_FLOOR: Floor = {
	key: 'small',
	name: 'Small hall',
	walkable: { outer: rect(0, 0, 30, 12), holes: [rect(8, 8, 10, 9)] },
	walls: wallAlongY(15, 0, 12, [[4, 7]]),
	edgesBlockSight: true,
	zones: [
		{
			key: 'west',
			name: 'West room',
			polygon: { outer: rect(0, 0, 15, 12), holes: [] },
			scheme: 'fruin_walkway',
			threshold: 1,
			private: false
		},
		{
			key: 'east',
			name: 'East room',
			polygon: { outer: rect(15, 0, 30, 12), holes: [] },
			scheme: 'fruin_walkway',
			threshold: 1,
			private: false
		}
	],
	waitingPlaces: [{ x: 2, y: 2, radius: 0.9 }],
	maps: { 'cart-small': { scale: 1, rotation: 0.4, tx: 3, ty: -2 } }
};

export const SMALL_VENUE: VenueModel = {
	venue: { key: 'test', name: 'Test hall', town: 'Pellmouth', timeZone: 'Europe/London' },
	models: [SMALL_MODEL],
	floors: [
		{
			floor: SMALL_FLOOR,
			places: [
				{ key: 'door', kind: 'entrance', minX: 1, minY: 9, maxX: 3, maxY: 11 },
				{ key: 'west-stand', kind: 'stand', minX: 4, minY: 2, maxX: 12, maxY: 4 },
				{ key: 'east-stand', kind: 'stand', minX: 18, minY: 2, maxX: 28, maxY: 5 },
				{ key: 'east-lounge', kind: 'lounge', minX: 18, minY: 7, maxX: 28, maxY: 11 }
			],
			goals: [
				{ key: 'west', x: 6, y: 6 },
				{ key: 'east', x: 27, y: 6 },
				{ key: 'south-east', x: 20, y: 1.5 }
			],
			docks: [
				{ key: 'dock-1', x: 2, y: 2 },
				{ key: 'dock-2', x: 2, y: 4 }
			],
			doors: [],
			lift: null
		}
	]
};

export function smallFleet(count: number, planner: FleetRobot['planner'] = 'decoupled'): FleetRobot[] {
	return Array.from({ length: count }, (_, i) => ({
		key: `cart-${i + 1}`,
		mark: `C${i + 1}`,
		model: SMALL_MODEL,
		floor: 0,
		maps: ['cart-small'],
		planner,
		software: 'cart 1.0.0'
	}));
}

/** Nothing goes wrong, nobody comes or goes, clocks and radio are perfect. */
export const CALM: Scenario = {
	...scenarioOf('day'),
	peak: [0],
	children: 0,
	curiosity: 0,
	faults: NO_FAULTS,
	firstOnlookersAt: null,
	link: CLEAN_LINK,
	sensor: { noise: 0, velocityNoise: 0, dropout: 0, idSwitch: 0, ghosts: 0, peopleHide: false },
	poseError: 0
};
