/** Gallery floor of Saltmarsh Hall, 120 × 40 m: two galleries joined by a bridge that narrows to 4 m. */

import type { Zone } from '../../src/lib/domain/floor.ts';
import { rect, wallAlongX, wallAlongY, type Place, type RobotGoal, type VenueFloor } from './model.ts';

const stands = [
	rect(18, 13, 24, 17),
	rect(30, 5, 36, 9),
	rect(82, 5, 88, 9),
	rect(92, 19, 98, 23),
	rect(82, 30, 88, 34),
	rect(20, 29, 25, 32)
];
const liftCore = rect(36, 36, 42, 38.5);

const walls = [
	...wallAlongY(15, 25, 40, [[30, 33]]),
	...wallAlongX(25, 0, 15),
	...wallAlongY(12, 0, 10, [[4, 6]]),
	...wallAlongX(10, 0, 12),
	...wallAlongY(105, 25, 40, [[30, 33]]),
	...wallAlongX(25, 105, 120)
];

const zone = (
	key: string,
	name: string,
	outer: Zone['polygon']['outer'],
	threshold: number | null,
	hidden = false
): Zone => ({
	key,
	name,
	polygon: { outer, holes: [] },
	scheme: 'fruin_walkway',
	threshold,
	private: hidden
});

const zones: Zone[] = [
	zone(
		'gallery-west',
		'West gallery',
		[
			[0, 10],
			[12, 10],
			[12, 0],
			[45, 0],
			[45, 26],
			[15, 26],
			[15, 25],
			[0, 25]
		],
		0.8
	),
	zone('seminar-1', 'Seminar room 1', rect(0, 25, 15, 40), 1.2),
	zone('quiet-room', 'Quiet room', rect(0, 0, 12, 10), null, true),
	zone('lift-lobby', 'Lift lobby', rect(15, 26, 45, 40), 0.7),
	zone('bridge-west', 'Bridge, west end', rect(45, 14, 57, 26), 0.6),
	zone('bridge-pinch', 'Bridge, the narrows', rect(57, 18, 63, 22), 0.5),
	zone('bridge-east', 'Bridge, east end', rect(63, 14, 75, 26), 0.6),
	zone(
		'gallery-east',
		'East gallery',
		[
			[75, 0],
			[105, 0],
			[105, 40],
			[75, 40]
		],
		0.8
	),
	zone('lounge', 'Lounge', rect(105, 0, 120, 25), 0.8),
	zone('seminar-2', 'Seminar room 2', rect(105, 25, 120, 40), 1.2)
];

const area = (key: string, kind: Place['kind'], minX: number, minY: number, maxX: number, maxY: number): Place => ({
	key,
	kind,
	minX,
	minY,
	maxX,
	maxY
});

const places: Place[] = [
	area('stairs-west', 'entrance', 38, 1, 43, 2.5),
	area('stairs-east', 'entrance', 77, 1, 81, 2.5),
	{
		...area('lifts', 'lift', 36, 32.5, 42, 35.5),
		queue: Array.from({ length: 18 }, (_, i) => ({ x: 37 + (i % 6) * 0.8, y: 35.2 - Math.floor(i / 6) * 0.9 })),
		service: 10
	},
	area('seminar-1', 'audience', 2, 27, 11, 38),
	area('seminar-2', 'audience', 109, 27, 118, 38),
	area('posters-west', 'stand', 17, 17.6, 25, 19.4),
	area('posters-south', 'stand', 29, 9.6, 37, 11.4),
	area('posters-east', 'stand', 81, 9.6, 89, 11.4),
	area('posters-middle', 'stand', 91, 16.8, 99, 18.6),
	area('view', 'lounge', 46.5, 24, 56, 25.5),
	area('lounge', 'lounge', 107, 3, 118, 22)
];

const goal = (key: string, x: number, y: number): RobotGoal => ({ key, x, y });

const goals = [
	goal('west-end', 4, 18),
	goal('west-posters', 27, 15),
	goal('west-south', 40, 8),
	goal('seminar-1-door', 17.5, 31.5),
	goal('bridge-head-west', 48, 20),
	goal('bridge-head-east', 72, 20),
	goal('east-posters', 85, 15),
	goal('east-north', 92, 34),
	goal('seminar-2-door', 102.5, 31.5),
	goal('lounge', 112, 12)
];
const docks = Array.from({ length: 9 }, (_, i) => goal(`gallery-dock-${i + 1}`, 17 + 2 * i, 39));
const lift = goal('gallery-lift', 43.4, 37);

export const GALLERY: VenueFloor = {
	floor: {
		key: 'saltmarsh-gallery',
		name: 'Gallery',
		walkable: {
			outer: [
				[0, 0],
				[45, 0],
				[45, 14],
				[57, 14],
				[57, 18],
				[63, 18],
				[63, 14],
				[75, 14],
				[75, 0],
				[120, 0],
				[120, 40],
				[75, 40],
				[75, 26],
				[63, 26],
				[63, 22],
				[57, 22],
				[57, 26],
				[45, 26],
				[45, 40],
				[0, 40]
			],
			holes: [...stands, liftCore]
		},
		walls,
		edgesBlockSight: true,
		zones,
		waitingPlaces: [{ x: lift.x, y: lift.y, radius: 2.2 }, ...docks.map(({ x, y }) => ({ x, y, radius: 0.9 }))],
		maps: {
			'limpet-gallery': { scale: 1, rotation: 1.1034, tx: 22.8, ty: -7.15 },
			'whelk-gallery': { scale: 1, rotation: -0.3319, tx: 3.02, ty: 44.71 },
			'avocet-gallery': { scale: 1, rotation: -2.4478, tx: 96.3, ty: 39.08 }
		}
	},
	places,
	goals,
	docks,
	doors: [],
	lift
};
