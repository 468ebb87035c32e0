/** What a sensor can see of a floor: a star-shaped polygon between the walls. */

import type { Ring } from './types.ts';
import type { WallIndex } from './walls.ts';

const TURN = 2 * Math.PI;

/** Corners of the range circle when no wall is near. Inscribed: the area is 0.04 % low. */
const CIRCLE_CORNERS = 128;

/** m; a wall this near to the sensor passes through it and hides nothing, or a sensor on a wall would be blind. Chosen by us. */
const AT_SENSOR = 1e-9;

/** Walls that cross each other inside one step are separated this many times; beyond that they cross in a point. */
const MAX_SPLITS = 8;

/**
 * The floor seen from (x, y), corners counter-clockwise, exact at wall ends. Walls count from both sides and may cross.
 * With a field of view narrower than a full turn the sensor itself is the first corner.
 *
 * @param range m; nothing beyond is seen. 0, a negative or NaN gives an empty ring.
 * @param fieldOfView absolute angles in rad, floor frame, from → to counter-clockwise; null is all round, as is a
 * span of a full turn or more; a span of 0 gives an empty ring
 */
export function computeVisibleRing(
	walls: WallIndex,
	x: number,
	y: number,
	range: number,
	fieldOfView: readonly [from: number, to: number] | null
): Ring {
	const span = fieldOfView ? fieldOfView[1] - fieldOfView[0] : TURN;
	const whole = span >= TURN - 1e-9;
	const width = whole ? TURN : ((span % TURN) + TURN) % TURN;
	if (!(range > 0) || !(width > 0) || Number.isNaN(x + y)) return [];
	const sweep = new Sweep(walls, x, y, range, whole ? -Math.PI : fieldOfView![0], width);
	const ring: [number, number][] = whole ? [] : [[x, y]];
	sweep.trace(ring);
	if (whole) closeTurn(ring);
	return ring;
}

/** Steps through the angles at which the nearest wall can change. */
class Sweep {
	/** Ends of wall pieces inside the range, relative to the sensor; the second counter-clockwise of the first. */
	readonly #ends: number[] = [];
	/** First and last angle of each piece from the start of the sweep, and the piece it belongs to */
	readonly #spans: number[] = [];
	readonly #pieces: number[] = [];
	readonly #angles: Float64Array;

	constructor(
		walls: WallIndex,
		readonly x: number,
		readonly y: number,
		readonly range: number,
		readonly start: number,
		readonly width: number
	) {
		for (const { ax, ay, bx, by } of walls.near(x, y, range)) this.#add(ax - x, ay - y, bx - x, by - y);
		const angles: number[] = [0, width];
		for (let k = 1; k < CIRCLE_CORNERS; k++) angles.push((k * TURN) / CIRCLE_CORNERS);
		angles.push(...this.#spans);
		this.#angles = Float64Array.from(angles.filter((angle) => angle <= width)).sort();
	}

	/** The part of a wall inside the range becomes one piece, or two when the sweep begins behind it. */
	#add(ax: number, ay: number, bx: number, by: number): void {
		const dx = bx - ax;
		const dy = by - ay;
		const a = dx * dx + dy * dy;
		const cross = ax * by - ay * bx;
		// A wall seen edge-on, or through the sensor, has no angle of its own.
		if (a === 0 || Math.abs(cross) <= AT_SENSOR * Math.sqrt(a)) return;
		const b = ax * dx + ay * dy;
		const root = b * b - a * (ax * ax + ay * ay - this.range * this.range);
		if (root <= 0) return;
		const from = Math.max(0, (-b - Math.sqrt(root)) / a);
		const to = Math.min(1, (-b + Math.sqrt(root)) / a);
		if (from >= to) return;
		const p = from === 0 ? [ax, ay] : [ax + dx * from, ay + dy * from];
		const q = to === 1 ? [bx, by] : [ax + dx * to, ay + dy * to];
		const [first, second] = cross > 0 ? [p, q] : [q, p];
		const piece = this.#ends.length / 4;
		this.#ends.push(first[0]!, first[1]!, second[0]!, second[1]!);
		const begin = this.#angleOf(first[0]!, first[1]!);
		const end = this.#angleOf(second[0]!, second[1]!);
		if (begin <= end) this.#span(piece, begin, end);
		else {
			this.#span(piece, begin, TURN);
			this.#span(piece, 0, end);
		}
	}

	#span(piece: number, begin: number, end: number): void {
		if (begin >= this.width) return;
		this.#spans.push(begin, Math.min(end, this.width));
		this.#pieces.push(piece);
	}

	/** From the start of the sweep, in [0, 2π). */
	#angleOf(x: number, y: number): number {
		const turned = (Math.atan2(y, x) - this.start) % TURN;
		return turned < 0 ? turned + TURN : turned;
	}

	trace(ring: [number, number][]): void {
		const angles = this.#angles;
		const waiting = this.#pieces.map((_, k) => k).sort((i, j) => this.#spans[2 * i]! - this.#spans[2 * j]!);
		let next = 0;
		let active: number[] = [];
		let previous = -2;
		for (let k = 0; k + 1 < angles.length; k++) {
			const low = angles[k]!;
			const high = angles[k + 1]!;
			if (high <= low) continue;
			active = active.filter((span) => this.#spans[2 * span + 1]! >= high);
			for (; next < waiting.length && this.#spans[2 * waiting[next]!]! <= low; next++) {
				if (this.#spans[2 * waiting[next]! + 1]! >= high) active.push(waiting[next]!);
			}
			previous = this.#step(ring, active, low, high, previous, MAX_SPLITS);
		}
	}

	/** Adds what is seen between two angles; returns the piece seen at the end, −1 for the range circle. */
	#step(
		ring: [number, number][],
		active: readonly number[],
		low: number,
		high: number,
		previous: number,
		splits: number
	): number {
		const first = this.#nearest(active, low, high);
		const last = this.#nearest(active, high, low);
		if (first !== last && first >= 0 && last >= 0 && splits > 0) {
			const middle = this.#crossing(first, last);
			if (middle > low && middle < high) {
				const seen = this.#step(ring, active, low, middle, previous, splits - 1);
				return this.#step(ring, active, middle, high, seen, splits - 1);
			}
		}
		// Along one wall only its far end matters.
		if (first === previous && first >= 0) ring.pop();
		else this.#push(ring, first, low);
		this.#push(ring, first, high);
		return first;
	}

	/** The piece nearest at `angle`; among those that meet there, the one nearest on the way to `toward`. */
	#nearest(active: readonly number[], angle: number, toward: number): number {
		if (active.length === 0) return -1;
		if (active.length === 1) return this.#pieces[active[0]!]!;
		const middle = (angle + toward) / 2;
		const [c, s] = [Math.cos(angle + this.start), Math.sin(angle + this.start)];
		let best = -1;
		let least = Infinity;
		let leastInside = NaN;
		for (const span of active) {
			const piece = this.#pieces[span]!;
			const distance = this.#distance(piece, c, s);
			if (distance > least + 1e-9) continue;
			if (distance >= least - 1e-9) {
				const [mc, ms] = [Math.cos(middle + this.start), Math.sin(middle + this.start)];
				if (Number.isNaN(leastInside)) leastInside = this.#distance(best, mc, ms);
				const inside = this.#distance(piece, mc, ms);
				if (inside >= leastInside) continue;
				leastInside = inside;
			} else leastInside = NaN;
			best = piece;
			least = distance;
		}
		return best;
	}

	/** Distance of a piece's line in the direction (c, s). */
	#distance(piece: number, c: number, s: number): number {
		const ax = this.#ends[4 * piece]!;
		const ay = this.#ends[4 * piece + 1]!;
		const dx = this.#ends[4 * piece + 2]! - ax;
		const dy = this.#ends[4 * piece + 3]! - ay;
		return (ax * dy - ay * dx) / (c * dy - s * dx);
	}

	/** Angle at which the lines of two pieces cross; NaN when they are parallel. */
	#crossing(i: number, j: number): number {
		const [ax, ay, bx, by] = this.#ends.slice(4 * i, 4 * i + 4) as [number, number, number, number];
		const [cx, cy, dx, dy] = this.#ends.slice(4 * j, 4 * j + 4) as [number, number, number, number];
		const across = (bx - ax) * (dy - cy) - (by - ay) * (dx - cx);
		if (across === 0) return NaN;
		const share = ((cx - ax) * (dy - cy) - (cy - ay) * (dx - cx)) / across;
		return this.#angleOf(ax + share * (bx - ax), ay + share * (by - ay));
	}

	#push(ring: [number, number][], piece: number, angle: number): void {
		const c = Math.cos(angle + this.start);
		const s = Math.sin(angle + this.start);
		const distance = piece < 0 ? this.range : Math.min(this.range, this.#distance(piece, c, s));
		const x = this.x + distance * c;
		const y = this.y + distance * s;
		const last = ring[ring.length - 1];
		if (last && Math.abs(last[0] - x) <= AT_SENSOR && Math.abs(last[1] - y) <= AT_SENSOR) return;
		ring.push([x, y]);
	}
}

/** The sweep of a full turn ends where it began. */
function closeTurn(ring: [number, number][]): void {
	const first = ring[0];
	const last = ring[ring.length - 1];
	if (!first || !last || ring.length < 2) return;
	if (Math.hypot(first[0] - last[0], first[1] - last[1]) <= AT_SENSOR) ring.pop();
}

/**
 * Tests points against a ring of `computeVisibleRing`, its border included, in O(log n).
 * (x, y) must be the sensor the ring was made for. An empty ring holds nothing.
 */
export function createStarTester(ring: Ring, x: number, y: number): (px: number, py: number) => boolean {
	const isSensor = ([cx, cy]: readonly [number, number]) => cx === x && cy === y;
	const whole = !ring.some(isSensor);
	const corners = whole ? ring : ring.filter((corner) => !isSensor(corner));
	if (corners.length < 2) return () => false;
	const size = corners.length;
	const dx = Float64Array.from(corners, ([cx]) => cx - x);
	const dy = Float64Array.from(corners, ([, cy]) => cy - y);
	const start = Math.atan2(dy[0]!, dx[0]!);
	const angles = new Float64Array(size);
	for (let i = 1; i < size; i++) {
		// Corners behind one another differ by rounding only and must not fall back by a turn.
		const turned = (Math.atan2(dy[i]!, dx[i]!) - start + TURN) % TURN;
		angles[i] = turned < angles[i - 1]! || turned - angles[i - 1]! > Math.PI ? angles[i - 1]! : turned;
	}
	return (px, py) => {
		const qx = px - x;
		const qy = py - y;
		if (qx === 0 && qy === 0) return true;
		const angle = (Math.atan2(qy, qx) - start + TURN) % TURN;
		let low = 0;
		let high = size;
		while (low < high) {
			const middle = (low + high) >> 1;
			if (angles[middle]! <= angle) low = middle + 1;
			else high = middle;
		}
		const i = low - 1;
		if (i === size - 1 && !whole && angle > angles[i]! + 1e-12) {
			// Rounding may put a point on the first edge just below a full turn.
			return TURN - angle < 1e-12 && Math.hypot(qx, qy) <= Math.hypot(dx[0]!, dy[0]!) + AT_SENSOR;
		}
		const from = i === size - 1 && !whole ? i - 1 : i;
		const to = (from + 1) % size;
		const ex = dx[to]! - dx[from]!;
		const ey = dy[to]! - dy[from]!;
		return ex * (qy - dy[from]!) - ey * (qx - dx[from]!) >= -AT_SENSOR * Math.hypot(ex, ey);
	};
}
