/** What a robot sees of the people round it: range, field of view, walls in the way, noise, misses, mixed-up ids and ghosts. */

import type { NavGrid } from '../core/nav-grid.ts';
import type { Random } from '../core/random.ts';
import type { Population } from '../crowd/population.ts';

export interface SensorSettings {
	/** m */
	readonly range: number;
	/** rad, full width centred on the heading; null all round */
	readonly fieldOfView: number | null;
	/** m, standard deviation at the robot; grows by a quarter of itself per metre of distance */
	readonly noise: number;
	/** m/s, of each velocity component; null when the robot sends no velocities */
	readonly velocityNoise: number | null;
	/** Chance per second that a person in view is lost for about a second */
	readonly dropout: number;
	/** Chance per second and person of getting a new id */
	readonly idSwitch: number;
	/** Ghost persons that appear per minute; each lasts about half a second */
	readonly ghosts: number;
	/** Whether people hide those behind them */
	readonly peopleHide: boolean;
}

export interface Sighting {
	readonly id: string;
	/** Floor frame, m and m/s */
	readonly x: number;
	readonly y: number;
	readonly vx: number;
	readonly vy: number;
	readonly sd: number;
}

interface Track {
	id: number;
	missingUntil: number;
	seenAt: number;
}

/** s after which a person not seen is forgotten and comes back under a new id. */
const FORGET_AFTER = 2;

export class Sensor {
	readonly #tracks = new Map<number, Track>();
	#nextId = 1;
	#ghosts: { id: number; x: number; y: number; until: number }[] = [];
	readonly #random: Random;

	constructor(
		readonly settings: SensorSettings,
		random: Random
	) {
		this.#random = random;
	}

	/** Ids start again, as after a restart of the robot. */
	restart(): void {
		this.#tracks.clear();
		this.#ghosts = [];
		this.#nextId = 1;
	}

	/** @param elapsed s since the last look */
	look(
		x: number,
		y: number,
		heading: number,
		people: Population,
		grid: NavGrid,
		time: number,
		elapsed: number
	): Sighting[] {
		const { range, fieldOfView, noise, velocityNoise, dropout, idSwitch, peopleHide } = this.settings;
		const random = this.#random;
		const inView: [slot: number, distance: number, bearing: number][] = [];
		people.near(x, y, range, (slot, distance) => {
			const bearing = Math.atan2(people.y[slot]! - y, people.x[slot]! - x);
			if (fieldOfView !== null && Math.abs(angleBetween(bearing, heading)) > fieldOfView / 2) return;
			if (grid.walls.isBlocked(x, y, people.x[slot]!, people.y[slot]!)) return;
			inView.push([slot, distance, bearing]);
		});
		if (peopleHide) inView.sort((a, b) => a[1] - b[1]);
		const seen: Sighting[] = [];
		for (let k = 0; k < inView.length; k++) {
			const [slot, distance, bearing] = inView[k]!;
			if (peopleHide && isHidden(inView, k, people)) continue;
			const uid = people.uid[slot]!;
			let track = this.#tracks.get(uid);
			if (!track || time - track.seenAt > FORGET_AFTER) {
				track = { id: this.#nextId++, missingUntil: 0, seenAt: time };
				this.#tracks.set(uid, track);
			}
			if (time < track.missingUntil) continue;
			if (random.chance(dropout * elapsed)) {
				track.missingUntil = time + random.exponential(0.8);
				continue;
			}
			if (random.chance(idSwitch * elapsed)) track.id = this.#nextId++;
			track.seenAt = time;
			const sd = noise * (1 + 0.25 * distance);
			seen.push({
				id: String(track.id),
				x: x + Math.cos(bearing) * distance + random.normal(0, sd),
				y: y + Math.sin(bearing) * distance + random.normal(0, sd),
				vx: people.vx[slot]! + random.normal(0, velocityNoise ?? 0),
				vy: people.vy[slot]! + random.normal(0, velocityNoise ?? 0),
				sd
			});
		}
		this.#addGhosts(seen, x, y, heading, time, elapsed);
		if (this.#tracks.size > 400) this.#forget(time);
		return seen;
	}

	#addGhosts(seen: Sighting[], x: number, y: number, heading: number, time: number, elapsed: number): void {
		const { ghosts, range, fieldOfView } = this.settings;
		const random = this.#random;
		this.#ghosts = this.#ghosts.filter(({ until }) => time < until);
		if (random.chance((ghosts / 60) * elapsed)) {
			const angle = heading + random.between(-0.5, 0.5) * (fieldOfView ?? 2 * Math.PI);
			const distance = range * Math.sqrt(random.next());
			this.#ghosts.push({
				id: this.#nextId++,
				x: x + Math.cos(angle) * distance,
				y: y + Math.sin(angle) * distance,
				until: time + random.exponential(0.5)
			});
		}
		for (const ghost of this.#ghosts) {
			seen.push({ id: String(ghost.id), x: ghost.x, y: ghost.y, vx: 0, vy: 0, sd: 0.2 });
		}
	}

	#forget(time: number): void {
		for (const [uid, track] of this.#tracks) if (time - track.seenAt > FORGET_AFTER) this.#tracks.delete(uid);
	}
}

/** Somebody nearer covers the line to this person's centre. `inView` is sorted by distance. */
function isHidden(inView: readonly [number, number, number][], k: number, people: Population): boolean {
	const [, distance, bearing] = inView[k]!;
	for (let j = 0; j < k; j++) {
		const [slot, near, other] = inView[j]!;
		if (near > distance - 0.3) break;
		if (Math.abs(angleBetween(bearing, other)) < Math.asin(Math.min(1, people.radius[slot]! / Math.max(near, 0.01))))
			return true;
	}
	return false;
}

function angleBetween(a: number, b: number): number {
	const d = Math.abs(a - b) % (2 * Math.PI);
	return d > Math.PI ? 2 * Math.PI - d : d;
}
