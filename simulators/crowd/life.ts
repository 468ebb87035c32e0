/** What the people on one floor are up to: arriving, visiting stands, queueing, listening, staring at a robot, leaving. */

import { computeDistanceField, type DistanceField, type NavGrid } from '../core/nav-grid.ts';
import type { Random } from '../core/random.ts';
import type { Place } from '../venue/model.ts';
import { FOLLOWING, STANDING, WALKING, type Population } from './population.ts';
import type { PhaseNow, Wish } from './timetable.ts';
import type { RobotBody } from './walking.ts';

const GOING = 0;
const STAYING = 1;
const QUEUEING = 2;
const LEAVING = 3;
const WATCHING = 4;

export interface LifeOptions {
	/** Share of people, 0…1, who make way for a robot that asks. Nobody is made to do all the avoiding: robots avoid as well. */
	readonly yielding: number;
	/** Share of arrivals that are children; they yield to nothing and stare more. */
	readonly children: number;
	/** Most people on this floor. */
	readonly peak: number;
	/** Chance per second that a grown-up within 2.5 m of a moving robot stops to look at it. */
	readonly curiosity: number;
}

/** s people stay: mean by kind of place. Chosen by us. */
const DWELL: Record<Place['kind'], number> = {
	entrance: 0,
	stand: 70,
	audience: 400,
	counter: 0,
	table: 240,
	lift: 0,
	lounge: 110
};
const MOST_WATCHERS = 4;

interface Queue {
	readonly place: number;
	readonly members: number[];
	nextServed: number;
}

export class Life {
	readonly act: Uint8Array;
	readonly #place: Int16Array;
	readonly #until: Float64Array;
	readonly #robot: Int16Array;
	readonly #angle: Float64Array;
	readonly #child: Uint8Array;
	readonly #forced: Uint8Array;
	readonly #fields: (DistanceField | null)[];
	readonly #queues: Queue[];
	/** Per place the spots that draw most people. */
	readonly #attractions: { x: number; top: boolean }[][];
	readonly #groups = new Map<number, number[]>();
	#lastGroup = 0;
	#time = 0;
	#watchers = new Int16Array(0);

	constructor(
		readonly people: Population,
		readonly grid: NavGrid,
		readonly places: readonly Place[],
		readonly random: Random,
		readonly options: LifeOptions
	) {
		const n = people.capacity;
		this.act = new Uint8Array(n);
		this.#place = new Int16Array(n);
		this.#until = new Float64Array(n);
		this.#robot = new Int16Array(n).fill(-1);
		this.#angle = new Float64Array(n);
		this.#child = new Uint8Array(n);
		this.#forced = new Uint8Array(n);
		this.#fields = places.map(() => null);
		this.#attractions = places.map(({ minX, maxX }) =>
			[0, 1, 2].map(() => ({ x: random.between(minX, maxX), top: random.chance(0.5) }))
		);
		this.#queues = places.flatMap((place, i) => (place.queue ? [{ place: i, members: [], nextServed: 0 }] : []));
	}

	/** Puts people where they would be in this phase, so that a simulation need not start with an empty house. */
	populate(now: PhaseNow): void {
		const wanted = Math.round(now.phase.fill * this.options.peak);
		for (let tries = 0; this.people.count < wanted && tries < 20 * wanted; tries++) {
			const place = this.#choose(now, 0);
			if (place < 0 || this.places[place]!.queue) continue;
			const spot = this.#spot(place);
			for (const slot of this.#arrive(spot.x, spot.y, 1)) {
				this.#stay(slot, place, now);
				this.#until[slot]! = this.#time + this.random.next() * (this.#until[slot]! - this.#time);
			}
		}
	}

	step(dt: number, time: number, now: PhaseNow, robots: readonly RobotBody[]): void {
		this.#time = time;
		this.#admit(dt, now);
		if (this.#watchers.length !== robots.length) this.#watchers = new Int16Array(robots.length);
		this.#watchers.fill(0);
		const { people } = this;
		for (let i = 0; i < people.end; i++) {
			if (people.alive[i] && this.act[i] === WATCHING) this.#watchers[this.#robot[i]!]!++;
		}
		for (const queue of this.#queues) this.#serve(queue, now);
		for (let i = 0; i < people.end; i++) {
			if (people.alive[i]) this.#live(i, now, robots);
		}
		this.#notice(dt, robots);
	}

	/**
	 * Makes the nearest `count` people gather round a robot and stay `seconds`; some walk over from up to `reach` metres.
	 * Returns how many came.
	 */
	gather(robot: number, body: RobotBody, count: number, seconds: number, reach = 12): number {
		const found: [slot: number, distance: number][] = [];
		this.people.near(body.x, body.y, reach, (slot, distance) => {
			if (this.act[slot] === STAYING || this.act[slot] === GOING) found.push([slot, distance]);
		});
		found.sort((a, b) => a[1] - b[1] || a[0] - b[0]);
		const chosen = found.slice(0, count);
		chosen.forEach(([slot], k) => {
			this.#watch(slot, robot, (2 * Math.PI * k) / Math.max(1, chosen.length), seconds);
			this.#forced[slot] = 1;
		});
		return chosen.length;
	}

	/** Adds one grown-up who stands at a point until `until` seconds. Returns the slot, −1 when the floor is full. */
	place(x: number, y: number, until: number): number {
		const slot = this.people.add({
			x,
			y,
			speed: 1.3,
			radius: 0.2,
			yields: this.random.chance(this.options.yielding),
			group: 0
		});
		if (slot < 0) return slot;
		this.act[slot] = STAYING;
		this.#until[slot] = until;
		this.#place[slot] = -1;
		this.#child[slot] = 0;
		return slot;
	}

	#admit(dt: number, now: PhaseNow): void {
		const missing = now.phase.fill * this.options.peak - this.people.count;
		if (missing <= 0) return;
		const doors = this.places.flatMap(({ kind }, i) => (kind === 'entrance' ? [i] : []));
		// Half the gap closes in about a minute; more than 3 groups a second do not fit through the doors.
		for (let n = this.random.poisson(Math.min(3, missing / 90) * dt); n > 0 && doors.length > 0; n--) {
			const spot = this.#spot(this.random.pick(doors));
			const size = this.#groupSize();
			const place = this.#choose(now, 0);
			for (const slot of this.#arrive(spot.x, spot.y, size)) this.#go(slot, place);
		}
	}

	/** About half of the visitors come in groups (Moussaïd et al. 2010: up to 70 %; from memory). */
	#groupSize(): number {
		return [1, 2, 3, 4][this.random.weighted([0.62, 0.24, 0.09, 0.05])]!;
	}

	#arrive(x: number, y: number, size: number): number[] {
		const group = size > 1 ? ++this.#lastGroup : 0;
		const slots: number[] = [];
		for (let k = 0; k < size; k++) {
			const child = k > 0 && this.random.chance(this.options.children * 3);
			// Preferred walking speed N(1.34, 0.26) m/s: Weidmann 1993.
			const speed = Math.max(0.5, this.random.normal(1.34, 0.26)) * (child ? 0.8 : 1);
			const slot = this.people.add({
				x: x + (k % 2) * 0.5,
				y: y + Math.floor(k / 2) * 0.5,
				speed,
				radius: child ? 0.16 : 0.2,
				yields: !child && this.random.chance(this.options.yielding),
				group
			});
			if (slot < 0) break;
			this.#child[slot] = child ? 1 : 0;
			this.#forced[slot] = 0;
			slots.push(slot);
		}
		if (group) this.#groups.set(group, slots);
		return slots;
	}

	#live(i: number, now: PhaseNow, robots: readonly RobotBody[]): void {
		const { people } = this;
		const act = this.act[i]!;
		if (act === STAYING) {
			if (this.#time >= this.#until[i]!) this.#moveOn(i, now);
			return;
		}
		if (act === WATCHING) {
			this.#keepWatching(i, now, robots);
			return;
		}
		if (act === QUEUEING) return;
		const away = Math.hypot(people.goalX[i]! - people.x[i]!, people.goalY[i]! - people.y[i]!);
		if (act === LEAVING) {
			if (away < 1.5) this.#vanish(i);
			return;
		}
		const place = this.#place[i]!;
		const queue = this.#queues.find((candidate) => candidate.place === place);
		if (queue) {
			if (away < 3) this.#join(i, queue);
		} else if (away < 0.5 || (away < 2 && people.held[i]! > 1.5)) {
			this.#stay(i, place, now);
		}
	}

	#stay(i: number, place: number, now: PhaseNow): void {
		const { people, random } = this;
		const kind = this.places[place]!.kind;
		people.mode[i] = STANDING;
		people.goalX[i] = people.x[i]!;
		people.goalY[i] = people.y[i]!;
		this.act[i] = STAYING;
		this.#place[i] = place;
		const stay = kind === 'audience' ? now.left + random.between(0, 90) : random.exponential(DWELL[kind] || 20) + 5;
		this.#until[i] = this.#time + Math.min(stay, 1800);
	}

	/** The next wish; a group goes together as soon as one of them wants to. */
	#moveOn(i: number, now: PhaseNow): void {
		const place = this.#choose(now, this.#place[i]!);
		const group = this.people.group[i]!;
		const company = group ? (this.#groups.get(group) ?? [i]) : [i];
		for (const slot of company) {
			if (!this.people.alive[slot] || this.people.group[slot] !== group) continue;
			if (slot === i || this.act[slot] === STAYING || this.act[slot] === GOING) this.#go(slot, place);
		}
	}

	/** Index of a place wished for in this phase, −1 for leaving. */
	#choose(now: PhaseNow, current: number): number {
		const crowdedOut = this.people.count > now.phase.fill * this.options.peak * 1.05;
		const weights = this.places.map((place, i) => {
			if (i === current || place.kind === 'entrance') return 0;
			const wish = now.phase.wishes[wishFor(place)] ?? 0;
			const queue = this.#queues.find((candidate) => candidate.place === i);
			const full = queue && queue.members.length >= (place.queue?.length ?? 0) - 2;
			const alike = this.places.filter((other) => wishFor(other) === wishFor(place)).length;
			return full ? 0 : wish / alike;
		});
		const staying = weights.reduce((sum, w) => sum + w, 0);
		const leave = (now.phase.wishes.leave ?? 0) + (crowdedOut ? staying * 0.5 : 0);
		const drawn = this.random.weighted([...weights, leave]);
		return drawn === this.places.length ? -1 : drawn;
	}

	#go(i: number, place: number): void {
		const { people } = this;
		this.#robot[i] = -1;
		this.#forced[i] = 0;
		people.mode[i] = WALKING;
		people.held[i] = people.wayX[i] = people.wayY[i] = 0;
		if (place < 0) {
			const doors = this.places.flatMap(({ kind }, k) => (kind === 'entrance' ? [k] : []));
			if (doors.length === 0) return;
			place = this.random.pick(doors);
			this.act[i] = LEAVING;
		} else this.act[i] = GOING;
		const queue = this.#queues.find((candidate) => candidate.place === place);
		const slots = this.places[place]!.queue;
		const spot = queue && slots ? slots[Math.min(queue.members.length, slots.length - 1)]! : this.#spot(place);
		this.#place[i] = place;
		people.goalX[i] = spot.x;
		people.goalY[i] = spot.y;
		people.field[i] = this.#fieldOf(place);
	}

	#join(i: number, queue: Queue): void {
		if (queue.members.length >= this.places[queue.place]!.queue!.length) {
			this.act[i] = STAYING;
			this.#until[i] = this.#time;
			return;
		}
		this.act[i] = QUEUEING;
		this.people.mode[i] = STANDING;
		queue.members.push(i);
	}

	#serve(queue: Queue, now: PhaseNow): void {
		const { people } = this;
		const { queue: slots = [], service = 10, kind } = this.places[queue.place]!;
		queue.members.forEach((slot, k) => {
			people.goalX[slot] = slots[k]!.x;
			people.goalY[slot] = slots[k]!.y;
		});
		if (this.#time < queue.nextServed || queue.members.length === 0) return;
		const head = queue.members[0]!;
		if (Math.hypot(people.x[head]! - slots[0]!.x, people.y[head]! - slots[0]!.y) > 1.2) return;
		queue.members.shift();
		queue.nextServed = this.#time + this.random.exponential(service);
		if (kind === 'lift') this.#vanish(head);
		else this.#go(head, wishFor(this.places[queue.place]!) === 'food' ? this.#table() : this.#choose(now, queue.place));
	}

	/** Stops serving one queue, for example when the lifts are out; served again from `until`. */
	hold(kind: Place['kind'], until: number): void {
		for (const queue of this.#queues) if (this.places[queue.place]!.kind === kind) queue.nextServed = until;
	}

	#table(): number {
		const tables = this.places.flatMap(({ kind }, i) => (kind === 'table' ? [i] : []));
		return tables.length ? this.random.pick(tables) : -1;
	}

	#vanish(i: number): void {
		const group = this.people.group[i]!;
		const company = this.#groups.get(group);
		if (company) {
			const rest = company.filter((slot) => slot !== i);
			if (rest.length) this.#groups.set(group, rest);
			else this.#groups.delete(group);
		}
		this.people.remove(i);
		this.act[i] = GOING;
		this.#robot[i] = -1;
	}

	#notice(dt: number, robots: readonly RobotBody[]): void {
		for (let r = 0; r < robots.length; r++) {
			const robot = robots[r]!;
			if (robot.vx * robot.vx + robot.vy * robot.vy < 0.04) continue;
			this.people.near(robot.x, robot.y, 2.5, (slot) => {
				if (this.act[slot] !== STAYING && this.act[slot] !== GOING) return;
				if (this.#watchers[r]! >= MOST_WATCHERS) return;
				const rate = this.#child[slot] ? 12 * this.options.curiosity : this.options.curiosity;
				if (!this.random.chance(rate * dt)) return;
				// Children stand right in the way, grown-ups keep to one side.
				const ahead = Math.atan2(robot.vy, robot.vx);
				const angle = this.#child[slot]
					? ahead
					: ahead + this.random.between(0.6, 1.6) * (this.random.chance(0.5) ? 1 : -1);
				this.#watch(slot, r, angle, Math.min(40, this.random.exponential(9) + 3));
				this.#watchers[r]!++;
			});
		}
	}

	#watch(i: number, robot: number, angle: number, seconds: number): void {
		this.act[i] = WATCHING;
		this.people.mode[i] = FOLLOWING;
		this.#robot[i] = robot;
		this.#angle[i] = angle;
		this.#until[i] = this.#time + seconds;
	}

	#keepWatching(i: number, now: PhaseNow, robots: readonly RobotBody[]): void {
		const { people } = this;
		const robot = robots[this.#robot[i]!];
		const away = robot ? Math.hypot(robot.x - people.x[i]!, robot.y - people.y[i]!) : Infinity;
		if (!robot || this.#time >= this.#until[i]! || away > (this.#forced[i] ? 20 : 4)) {
			this.#robot[i] = -1;
			this.#forced[i] = 0;
			if (this.#place[i]! < 0) {
				people.mode[i] = STANDING;
				people.goalX[i] = people.x[i]!;
				people.goalY[i] = people.y[i]!;
				this.act[i] = STAYING;
				this.#until[i] = Math.max(this.#until[i]!, this.#time + 20);
				this.#place[i] = 0;
			} else this.#moveOn(i, now);
			return;
		}
		const distance = robot.radius + people.radius[i]! + 0.3;
		people.goalX[i] = robot.x + Math.cos(this.#angle[i]!) * distance;
		people.goalY[i] = robot.y + Math.sin(this.#angle[i]!) * distance;
	}

	/** A spot inside a place where a person fits; beside a stand people keep to the edges of the aisle. */
	#spot(place: number): { x: number; y: number } {
		const { minX, minY, maxX, maxY, kind } = this.places[place]!;
		let x = (minX + maxX) / 2;
		let y = (minY + maxY) / 2;
		for (let tries = 0; tries < 12; tries++) {
			x = this.random.between(minX, maxX);
			y = this.random.between(minY, maxY);
			if (kind === 'stand' && this.random.chance(0.85)) {
				// Most people look at the few stands everybody looks at.
				const attraction = this.#attractions[place]![this.random.weighted([4, 2, 1])]!;
				x = Math.min(maxX, Math.max(minX, this.random.normal(attraction.x, 1.3)));
				y = attraction.top ? maxY - this.random.exponential(0.35) : minY + this.random.exponential(0.35);
			}
			const at = this.grid.index(x, y);
			if (at >= 0 && this.grid.free[at]) break;
		}
		return { x, y };
	}

	#fieldOf(place: number): DistanceField {
		const known = this.#fields[place];
		if (known) return known;
		const { minX, minY, maxX, maxY, queue } = this.places[place]!;
		const sources = [];
		for (let x = minX + 0.25; x < maxX; x += 0.5) {
			for (let y = minY + 0.25; y < maxY; y += 0.5) {
				const at = this.grid.index(x, y);
				if (at >= 0 && this.grid.free[at]) sources.push({ x, y });
			}
		}
		const field = computeDistanceField(this.grid, [...sources, ...(queue ?? [])]);
		this.#fields[place] = field;
		return field;
	}
}

function wishFor(place: Place): Wish {
	if (place.kind !== 'counter') return place.kind;
	return place.key.startsWith('food') ? 'food' : 'cloakroom';
}
