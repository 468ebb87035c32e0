/** Room to move of one robot among 40 persons, beside a straightforward implementation that samples velocities densely. */

import { computeRooms, ROOM_DEFAULTS, type RoomQuery } from '../../src/lib/domain/room/room.ts';

/** Reproducible numbers 0…1: a linear congruential generator. */
function randomFrom(seed: number): () => number {
	let state = seed >>> 0;
	return () => (state = (Math.imul(state, 1664525) + 1013904223) >>> 0) / 2 ** 32;
}

/** `count` persons at `density` persons/m² round a robot, a quarter of them standing. */
function crowd(count: number, density: number, seed: number): RoomQuery {
	const random = randomFrom(seed);
	const reach = Math.sqrt(count / (Math.PI * density));
	const persons = Array.from({ length: count }, () => {
		const distance = Math.max(0.6, reach * Math.sqrt(random()));
		const [at, heading] = [random() * 2 * Math.PI, random() * 2 * Math.PI];
		const speed = random() < 0.25 ? 0 : 0.3 + 0.9 * random();
		return {
			x: distance * Math.cos(at),
			y: distance * Math.sin(at),
			vx: speed * Math.cos(heading),
			vy: speed * Math.sin(heading),
			radius: ROOM_DEFAULTS.personRadius,
			flexibility: ROOM_DEFAULTS.flexibility
		};
	});
	const { horizon, sector } = ROOM_DEFAULTS;
	return { x: 0, y: 0, radius: 0.3, maxSpeed: 1.5, direction: 0, horizon, sector, persons, walls: [] };
}

/** Robot velocities every 2 cm/s, each person's changed velocity in 36 directions, closed-form least distance. */
function sampleRoom(query: RoomQuery, scale: number): number {
	const step = 0.02;
	let best = 0;
	for (let wx = step; wx <= query.maxSpeed; wx += step) {
		for (let wy = -query.maxSpeed; wy <= query.maxSpeed; wy += step) {
			if (wx <= best || Math.hypot(wx, wy) > query.maxSpeed || Math.abs(Math.atan2(wy, wx)) > query.sector) continue;
			if (query.persons.every((person) => canPass(query, person, wx, wy, scale * person.flexibility))) best = wx;
		}
	}
	return best;
}

function canPass(
	query: RoomQuery,
	person: RoomQuery['persons'][number],
	wx: number,
	wy: number,
	change: number
): boolean {
	for (let k = 0; k < (change > 0 ? 37 : 1); k++) {
		const angle = (k * Math.PI) / 18;
		const vx = person.vx - wx + (k < 36 ? change * Math.cos(angle) : 0);
		const vy = person.vy - wy + (k < 36 ? change * Math.sin(angle) : 0);
		const square = vx * vx + vy * vy;
		const closest = square > 0 ? -(person.x * vx + person.y * vy) / square : 0;
		const time = Math.min(query.horizon, Math.max(0, closest));
		const apart = Math.hypot(person.x + vx * time, person.y + vy * time);
		if (apart >= Math.min(query.radius + person.radius, Math.hypot(person.x, person.y))) return true;
	}
	return false;
}

/** Both rooms of one robot; each call takes the next of 64 crowds, so that the times are of a mix, not of one lucky scene. */
function part(density: number) {
	const scenes = Array.from({ length: 64 }, (_, seed) => crowd(40, density, 1000 + seed));
	let next = 0;
	const scene = () => scenes[next++ % scenes.length]!;
	return {
		name: `room alone and shared, 40 persons at ${density.toFixed(1)} persons/m²`,
		ours: () => void computeRooms(scene()),
		straightforward: () => {
			const query = scene();
			sampleRoom(query, 0);
			sampleRoom(query, 1);
		},
		target_ms: 1
	};
}

export function roomParts(): { name: string; ours: () => void; straightforward: () => void; target_ms: number }[] {
	return [0.5, 1, 2].map(part);
}
