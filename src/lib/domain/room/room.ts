/**
 * Could the robot have gone on, and did that need anyone to yield? Room to move and the verdict.
 *
 * The two rooms and the verdict are our definitions on the truncated velocity obstacle (`velocity-obstacle.ts`): the fastest
 * constant velocity toward the goal that stays clear of everybody for the whole horizon, when person i may change velocity by
 * at most its flexibility. Everybody is asked for himself: yields are not checked against each other, walls or third
 * parties, so room shared is an upper bound: "they could make room", never "it is safe".
 */

import type { Point, Segment } from '../geometry/types.ts';
import { findRoom, type Room } from './room-search.ts';
import { buildObstacles } from './velocity-obstacle.ts';

/** Absolute position and velocity in the floor frame, m and m/s. */
export interface RoomPerson {
	readonly x: number;
	readonly y: number;
	readonly vx: number;
	readonly vy: number;
	/** m; add the position error before trusting `open`, as room can hang on a slit. */
	readonly radius: number;
	/** m/s by which this person may change velocity to let the robot pass; 0 is "will not", not "unknown". */
	readonly flexibility: number;
}

export interface RoomQuery {
	readonly x: number;
	readonly y: number;
	readonly radius: number;
	/** m/s */
	readonly maxSpeed: number;
	/** rad toward the goal */
	readonly direction: number;
	/** s, > 0: for how long a velocity must stay clear. Too short and creeping up to somebody counts as room; too long forbids everything. */
	readonly horizon: number;
	/** rad to either side of `direction` that count as going on, 0…π/2 */
	readonly sector: number;
	readonly persons: readonly RoomPerson[];
	readonly walls: readonly Segment[];
}

/** To start from, chosen by us and to be calibrated on simulated truth: 1 m in 4 s counts as going on. */
export const ROOM_DEFAULTS = {
	horizon: 4,
	sector: (75 * Math.PI) / 180,
	goSpeed: 0.25,
	personRadius: 0.25,
	flexibility: 0.3
} as const;

export type Verdict = 'open' | 'shared' | 'packed' | 'unseen';

/**
 * Greatest progress speed toward the goal, 0…maxSpeed m/s, with everyone's flexibility as given, and the velocity in the
 * floor frame that has it (null when the room is 0). Standing still counts as 0, even if somebody walks into the robot.
 * NaN anywhere in the query gives `{ speed: NaN, velocity: null }`. Below 1 ms for 40 persons.
 * @throws RangeError when the horizon is not positive
 */
export function computeRoom(query: RoomQuery): { speed: number; velocity: Point | null } {
	if (!isFinite(query)) return { speed: NaN, velocity: null };
	const room = findRoom(obstaclesOf(query), query, 1);
	return { speed: room.speed, velocity: toFloor(room, query) };
}

/**
 * Room alone (nobody yields) and room shared (everybody yields by his flexibility; never less than alone), m/s, with the
 * velocities as in `computeRoom`. NaN and null when the query holds a NaN.
 * @throws RangeError when the horizon is not positive
 */
export function computeRooms(query: RoomQuery): {
	alone: number;
	shared: number;
	aloneVelocity: Point | null;
	sharedVelocity: Point | null;
} {
	if (!isFinite(query)) {
		return { alone: NaN, shared: NaN, aloneVelocity: null, sharedVelocity: null };
	}
	const obstacles = obstaclesOf(query);
	const alone = findRoom(obstacles, query, 0);
	const shared = findRoom(obstacles, query, 1, alone);
	return {
		alone: alone.speed,
		shared: shared.speed,
		aloneVelocity: toFloor(alone, query),
		sharedVelocity: toFloor(shared, query)
	};
}

/**
 * `open`: there was room alone, look at the robot. `shared`: only if people yield. `packed`: not even then.
 * `unseen`: too little of the reachable disc (radius maxSpeed · horizon) was observed, or a number is missing (null, NaN).
 *
 * @param goSpeed m/s at or above which there is room
 * @param observedShare 0…1
 * @param leastObserved share below which nothing is said
 */
export function computeVerdict(found: {
	readonly alone: number | null;
	readonly shared: number | null;
	readonly goSpeed: number;
	readonly observedShare: number | null;
	readonly leastObserved: number;
}): Verdict {
	const { alone, shared, goSpeed, observedShare, leastObserved } = found;
	if (alone === null || shared === null || Number.isNaN(alone) || Number.isNaN(shared)) return 'unseen';
	if (observedShare === null || !(observedShare >= leastObserved)) return 'unseen';
	if (alone >= goSpeed - 1e-9) return 'open';
	return shared >= goSpeed - 1e-9 ? 'shared' : 'packed';
}

/** Robot at the origin, goal along +x. */
function obstaclesOf(query: RoomQuery) {
	if (!(query.horizon > 0)) throw new RangeError(`The horizon must be positive, not ${query.horizon}.`);
	const cos = Math.cos(query.direction);
	const sin = Math.sin(query.direction);
	const along = (x: number, y: number) => cos * x + sin * y;
	const across = (x: number, y: number) => cos * y - sin * x;
	const discs = query.persons.map((person) => ({
		x: along(person.x - query.x, person.y - query.y),
		y: across(person.x - query.x, person.y - query.y),
		vx: along(person.vx, person.vy),
		vy: across(person.vx, person.vy),
		reach: query.radius + person.radius,
		flexibility: person.flexibility
	}));
	const walls = query.walls.map(({ ax, ay, bx, by }) => ({
		ax: along(ax - query.x, ay - query.y),
		ay: across(ax - query.x, ay - query.y),
		bx: along(bx - query.x, by - query.y),
		by: across(bx - query.x, by - query.y)
	}));
	return buildObstacles(discs, walls, query);
}

function toFloor({ speed, x, y }: Room, { direction }: RoomQuery): Point | null {
	if (speed === 0) return null;
	const cos = Math.cos(direction);
	const sin = Math.sin(direction);
	return { x: cos * x - sin * y, y: sin * x + cos * y };
}

function isFinite({ x, y, radius, maxSpeed, direction, horizon, sector, persons, walls }: RoomQuery): boolean {
	let sum = x + y + radius + maxSpeed + direction + horizon + sector;
	for (const p of persons) sum += p.x + p.y + p.vx + p.vy + p.radius + p.flexibility;
	for (const w of walls) sum += w.ax + w.ay + w.bx + w.by;
	return Number.isFinite(sum);
}
