/** Saltmarsh Hall in Pellmouth: the invented convention centre of the demo, and its fleet. */

import type { RobotModel } from '../../src/lib/domain/floor.ts';
import { GALLERY } from './gallery.ts';
import { GROUND } from './ground.ts';
import type { FleetRobot, Planner, VenueModel } from './model.ts';

const LIMPET: RobotModel = {
	key: 'limpet',
	name: 'Limpet carrier',
	letter: 'P',
	length: 0.9,
	width: 0.66,
	radius: 0.5,
	maxSpeed: 1.2
};
const WHELK: RobotModel = {
	key: 'whelk',
	name: 'Whelk sweeper',
	letter: 'S',
	length: 0.76,
	width: 0.7,
	radius: 0.45,
	maxSpeed: 0.8
};
const AVOCET: RobotModel = {
	key: 'avocet',
	name: 'Avocet guide',
	letter: 'G',
	length: 0.5,
	width: 0.5,
	radius: 0.3,
	maxSpeed: 1
};

export const SALTMARSH: VenueModel = {
	venue: { key: 'saltmarsh', name: 'Saltmarsh Hall', town: 'Pellmouth', timeZone: 'Europe/London' },
	floors: [GROUND, GALLERY],
	models: [LIMPET, WHELK, AVOCET]
};

const TRADES = [
	{ name: 'porter', model: LIMPET },
	{ name: 'sweeper', model: WHELK },
	{ name: 'guide', model: AVOCET }
] as const;

/** Trade (0 porter, 1 sweeper, 2 guide) and floor of each of the 24, in the order robots are added to a fleet. */
const ORDER: readonly (readonly [trade: 0 | 1 | 2, floor: 0 | 1])[] = [
	[0, 0],
	[1, 0],
	[2, 0],
	[0, 1],
	[0, 0],
	[1, 1],
	[2, 1],
	[0, 0],
	[1, 0],
	[0, 0],
	[2, 0],
	[0, 1],
	[1, 0],
	[0, 0],
	[1, 1],
	[2, 0],
	[0, 0],
	[1, 0],
	[2, 1],
	[0, 0],
	[1, 0],
	[0, 1],
	[2, 0],
	[1, 1]
];

/**
 * The first `count` robots of the fleet; 24 make the demo. Beyond 24 the pattern repeats, for load tests.
 * About a third run newer software that counts on people yielding.
 */
export function fleetOf(count = 24): FleetRobot[] {
	const made = [0, 0, 0];
	return Array.from({ length: count }, (_, i) => {
		const [trade, floor] = ORDER[i % ORDER.length]!;
		const { name, model } = TRADES[trade];
		const number = (made[trade] = made[trade]! + 1);
		const planner: Planner = number % 3 === 0 ? 'counting' : 'decoupled';
		return {
			key: `${name}-${String(number).padStart(2, '0')}`,
			mark: `${model.letter}${number}`,
			model,
			floor,
			maps: [`${model.key}-ground`, `${model.key}-gallery`],
			planner,
			software: planner === 'counting' ? `${model.key} 5.0.1` : `${model.key} 4.2.0`
		};
	});
}
