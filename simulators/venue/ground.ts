/** Ground floor of Saltmarsh Hall, 120 × 85 m: foyer, cloakroom, three halls, food court and the loading corridor. */

import type { Zone } from '../../src/lib/domain/floor.ts';
import { rect, wallAlongX, wallAlongY, type Place, type RobotGoal, type VenueFloor } from './model.ts';

const standsA = [4.5, 13, 21.5, 30].flatMap((x) => [35.5, 42, 53.5, 61].map((y) => rect(x, y, x + 5, y + 4)));
const standsC = [84, 96, 108].flatMap((x) => [35, 43, 54, 62].map((y) => rect(x, y, x + 6, y + 4)));
const tables = [96, 101, 106, 111, 115].flatMap((x) => [13, 17, 21, 25].map((y) => rect(x, y, x + 1, y + 1)));
const pillars = [
	[30, 8],
	[30, 22],
	[78, 8],
	[78, 22],
	[46, 38],
	[74, 38],
	[46, 57],
	[74, 57]
].map(([x, y]) => rect(x!, y!, x! + 0.8, y! + 0.8));

const fixtures = {
	infoDesk: rect(36, 12, 42, 14),
	liftCore: rect(57, 14, 63, 18),
	stage: rect(51, 63, 70, 69.5),
	mixerDesk: rect(58, 44, 62, 46),
	kitchen: rect(94, 1.5, 114, 3),
	palletsWest: rect(38, 76.5, 41, 78.5),
	palletsEast: rect(84, 76.5, 88, 78.5)
};

const walls = [
	...wallAlongX(70, 0, 120, [
		[18, 22],
		[43, 47],
		[98, 102]
	]),
	...wallAlongX(30, 0, 120, [
		[22, 28],
		[32, 37],
		[47, 54],
		[66, 73],
		[83, 88],
		[103, 110]
	]),
	...wallAlongY(40, 30, 70, [[47, 52]]),
	...wallAlongY(80, 30, 70, [[48, 53]]),
	...wallAlongY(18, 0, 30, [
		[5, 11],
		[22, 24]
	]),
	...wallAlongX(16, 0, 18),
	...wallAlongY(90, 0, 30, [
		[4, 10],
		[18, 25]
	])
];

const zone = (
	key: string,
	name: string,
	outer: Zone['polygon']['outer'],
	more: Partial<Pick<Zone, 'scheme' | 'threshold' | 'private'>> = {}
): Zone => ({
	key,
	name,
	polygon: { outer, holes: [] },
	scheme: more.scheme ?? 'fruin_walkway',
	threshold: more.threshold === undefined ? 0.8 : more.threshold,
	private: more.private ?? false
});

const zones: Zone[] = [
	zone('entrance', 'Main entrance', rect(46, -5, 74, 4)),
	zone('foyer-west', 'Foyer, west side', [
		[18, 0],
		[46, 0],
		[46, 30],
		[18, 30]
	]),
	zone('foyer-lifts', 'Foyer, lifts', rect(46, 4, 74, 30), { threshold: 0.7 }),
	zone('foyer-east', 'Foyer, east side', rect(74, 0, 90, 30)),
	zone('cloakroom', 'Cloakroom', rect(0, 0, 18, 16), { scheme: 'fruin_queueing', threshold: 1.2 }),
	zone('first-aid', 'First-aid room', rect(0, 16, 18, 30), { threshold: null, private: true }),
	zone('hall-a', 'Hall A', rect(0, 30, 40, 70)),
	zone('hall-b-rear', 'Hall B, rear', rect(40, 30, 80, 48)),
	zone('hall-b-stage', 'Hall B, before the stage', rect(40, 48, 80, 70), { scheme: 'fruin_queueing', threshold: 1.5 }),
	zone('hall-c', 'Hall C', rect(80, 30, 120, 70)),
	zone('food-court', 'Food court', rect(90, 0, 120, 30), { threshold: 0.6 }),
	zone('loading-west', 'Loading corridor, west', rect(0, 70, 60, 80), { threshold: 0.3 }),
	zone('loading-east', 'Loading corridor, east', rect(60, 70, 120, 80), { threshold: 0.3 })
];

const place = (
	key: string,
	kind: Place['kind'],
	[minX, minY, maxX, maxY]: readonly [number, number, number, number],
	more: Partial<Pick<Place, 'queue' | 'service'>> = {}
): Place => ({ key, kind, minX, minY, maxX, maxY, ...more });

/** Queue slots 0.7 m apart, head first, folded into rows of `perRow`. */
function queueSlots(x: number, y: number, stepX: number, stepY: number, count: number, perRow: number) {
	return Array.from({ length: count }, (_, i) => {
		const row = Math.floor(i / perRow);
		const along = row % 2 ? perRow - 1 - (i % perRow) : i % perRow;
		return stepX ? { x: x + along * stepX, y: y + row * 0.9 } : { x: x + row * 0.9, y: y + along * stepY };
	});
}

const places: Place[] = [
	place('entrance', 'entrance', [50, -4.5, 70, -3]),
	...[33.2, 40.3, 50, 58.8, 66.5].map((y, i) => place(`hall-a-${i + 1}`, 'stand', [4, y - 0.9, 36, y + 0.9])),
	...[32.5, 41, 50.5, 60, 67.5].map((y, i) => place(`hall-c-${i + 1}`, 'stand', [83, y - 1, 115, y + 1])),
	place('audience', 'audience', [51, 52.5, 69, 61]),
	place('hall-b-rear', 'lounge', [54, 33, 66, 40]),
	place('cloakroom', 'counter', [6, 3, 14, 12], { queue: queueSlots(4, 3, 0, 0.75, 30, 12), service: 6 }),
	place('food-west', 'counter', [94, 3.5, 100, 9], { queue: queueSlots(97, 3.8, 0, 0.8, 16, 8), service: 14 }),
	place('food-east', 'counter', [106, 3.5, 112, 9], { queue: queueSlots(109, 3.8, 0, 0.8, 16, 8), service: 14 }),
	...[14.5, 18.5, 22.5].map((y, i) => place(`tables-${i + 1}`, 'table', [95, y, 116, y + 2])),
	place('lifts', 'lift', [57, 10, 63, 13.5], { queue: queueSlots(58, 12.9, 0.8, 0, 18, 6), service: 9 }),
	place('foyer-west', 'lounge', [32, 6, 43, 11]),
	place('foyer-east', 'lounge', [76, 20, 84, 28])
];

const goal = (key: string, x: number, y: number): RobotGoal => ({ key, x, y });

const goals: RobotGoal[] = [
	goal('cloakroom-hatch', 15, 8),
	goal('info-desk', 39, 10),
	goal('foyer-west', 26, 15),
	goal('foyer-east', 84, 15),
	goal('entrance-mat', 60, 1),
	goal('hall-a-west', 11.2, 48),
	goal('hall-a-east', 28.2, 51.5),
	goal('hall-a-south', 20, 33),
	goal('hall-b-west', 43, 45),
	goal('hall-b-east', 77, 45),
	goal('hall-b-stage-door', 47, 63),
	goal('hall-c-west', 93, 51),
	goal('hall-c-north', 105, 60),
	goal('hall-c-south', 93, 33),
	goal('kitchen', 117, 2.5),
	goal('tables', 92.5, 27.5),
	goal('tables-east', 118.3, 20),
	goal('loading-east', 114, 73),
	goal('loading-west', 10, 73),
	goal('loading-middle', 66, 73)
];

const docks = Array.from({ length: 17 }, (_, i) => goal(`dock-${i + 1}`, 3 + 2 * i, 78.6));

const doors = [goal('door-a', 20, 70), goal('door-b', 45, 70), goal('door-c', 100, 70)];
// The goods lift is on the west side of the core, away from the visitors' doors.
const lift = goal('lift', 55.6, 16);

export const GROUND: VenueFloor = {
	floor: {
		key: 'saltmarsh-ground',
		name: 'Ground floor',
		walkable: {
			outer: [
				[0, 0],
				[46, 0],
				[46, -5],
				[74, -5],
				[74, 0],
				[120, 0],
				[120, 80],
				[0, 80]
			],
			holes: [...standsA, ...standsC, ...tables, ...pillars, ...Object.values(fixtures)]
		},
		walls,
		edgesBlockSight: true,
		zones,
		waitingPlaces: [
			{ x: lift.x, y: lift.y, radius: 2.2 },
			...doors.map(({ x, y }) => ({ x, y, radius: 1.6 })),
			...docks.map(({ x, y }) => ({ x, y, radius: 0.9 }))
		],
		// Each model made its own map: turned and shifted against the drawing, as scans are.
		maps: {
			'limpet-ground': { scale: 1, rotation: 0.2187, tx: 61.42, ty: 33.9 },
			'whelk-ground': { scale: 1, rotation: -1.5461, tx: 4.66, ty: 81.37 },
			'avocet-ground': { scale: 1, rotation: 2.9042, tx: 118.05, ty: 12.44 }
		}
	},
	places,
	goals,
	docks,
	doors,
	lift
};
