/** Tracks in columns while scans are taken in: rows are changed in place, the tracks they were made from never are. */

import { processNoise } from './kalman.ts';
import { noiseTimeAfter, reachAfter, speedLeftAfter, type PersonTrack, type Sighting } from './person-track.ts';

/** Of a track that is in the same place as no other. */
export const NOBODY = -1;

const NUMBERS = [
	...(['x', 'y', 'vx', 'vy', 'variance', 'cross', 'speedVariance'] as const),
	...(['updatedAt', 'seenAt', 'bornAt', 'closeSince'] as const)
] as const;
const INTEGERS = ['id', 'hits', 'misses', 'closeTo', 'measuredIn'] as const;

export class TrackTable {
	/** Rows in use, in the order of the tracks; rows of people who are gone keep their place and are not alive. */
	size = 0;
	/** Rows there is room for; every column is as long. Making room replaces the columns. */
	capacity = 0;
	alive = new Uint8Array(0);
	/** Number of the scan that last measured the row; 0 none of those taken in here */
	measuredIn = new Int32Array(0);

	/** As in `PersonTrack` */
	id = new Int32Array(0);
	x = new Float64Array(0);
	y = new Float64Array(0);
	vx = new Float64Array(0);
	vy = new Float64Array(0);
	variance = new Float64Array(0);
	cross = new Float64Array(0);
	speedVariance = new Float64Array(0);
	updatedAt = new Float64Array(0);
	seenAt = new Float64Array(0);
	bornAt = new Float64Array(0);
	hits = new Int32Array(0);
	confirmed = new Uint8Array(0);
	misses = new Int32Array(0);
	/** Id of the track in the same place, or `NOBODY`, and s since when */
	closeTo = new Int32Array(0);
	closeSince = new Float64Array(0);
	readonly updatedBy: string[] = [];
	readonly #seenBy: (readonly Sighting[])[] = [];

	/** 1 when the sightings of the row are its own and may be changed */
	#ownsSightings = new Uint8Array(0);
	/** 1 when the row differs from the track it was made from */
	#changed = new Uint8Array(0);
	readonly #given: readonly PersonTrack[];
	#anyChange = false;

	constructor(tracks: readonly PersonTrack[]) {
		this.#given = tracks;
		this.reserve(tracks.length);
		for (const track of tracks) this.#load(track);
	}

	/** Makes room for as many more rows. */
	reserve(rows: number): void {
		if (this.size + rows <= this.capacity) return;
		this.capacity = Math.max(this.size + rows, Math.ceil(1.25 * this.capacity) + 16);
		for (const column of NUMBERS) this[column] = widened(this[column], this.capacity);
		for (const column of INTEGERS) this[column] = widened(this[column], this.capacity);
		this.alive = widened(this.alive, this.capacity);
		this.confirmed = widened(this.confirmed, this.capacity);
		this.#ownsSightings = widened(this.#ownsSightings, this.capacity);
		this.#changed = widened(this.#changed, this.capacity);
	}

	/** Row of one more track, for which room has been made. */
	add(track: PersonTrack): number {
		const row = this.#load(track);
		this.markChanged(row);
		return row;
	}

	remove(row: number): void {
		this.alive[row] = 0;
		this.#anyChange = true;
	}

	/** To be called for a row whose columns have been written to. */
	markChanged(row: number): void {
		this.#changed[row] = 1;
		this.#anyChange = true;
	}

	rowOf(id: number): number {
		for (let row = 0; row < this.size; row += 1) if (this.id[row] === id && this.alive[row] === 1) return row;
		return -1;
	}

	sightings(row: number): readonly Sighting[] {
		return this.#seenBy[row]!;
	}

	/** The sightings of a row, to be changed. */
	ownSightings(row: number): Sighting[] {
		if (this.#ownsSightings[row] === 0) {
			this.#seenBy[row] = this.#seenBy[row]!.slice();
			this.#ownsSightings[row] = 1;
		}
		this.markChanged(row);
		return this.#seenBy[row] as Sighting[];
	}

	/** Moves the state of a row on to a time not before it, in the constant-velocity model with speed that fades unseen. */
	carry(row: number, time: number, q: number): void {
		const dt = time - this.updatedAt[row]!;
		const reach = reachAfter(dt);
		const left = speedLeftAfter(dt);
		const noise = processNoise(noiseTimeAfter(dt), q);
		const cross = this.cross[row]!;
		const speed = this.speedVariance[row]!;
		this.x[row]! += reach * this.vx[row]!;
		this.y[row]! += reach * this.vy[row]!;
		this.vx[row]! *= left;
		this.vy[row]! *= left;
		this.variance[row]! += 2 * reach * cross + reach * reach * speed + noise.position;
		this.cross[row] = left * (cross + reach * speed) + noise.cross;
		this.speedVariance[row] = left * left * speed + noise.velocity;
	}

	/** Kalman update of a row by a position (m) of variance `noise` (m²): `update` of kalman.ts for round covariances. */
	correct(row: number, zx: number, zy: number, noise: number): void {
		const variance = this.variance[row]!;
		const cross = this.cross[row]!;
		const gain = variance / (variance + noise);
		const speedGain = cross / (variance + noise);
		const dx = zx - this.x[row]!;
		const dy = zy - this.y[row]!;
		this.x[row]! += gain * dx;
		this.y[row]! += gain * dy;
		this.vx[row]! += speedGain * dx;
		this.vy[row]! += speedGain * dy;
		const rest = 1 - gain;
		this.variance[row] = rest * rest * variance + gain * gain * noise;
		this.cross[row] = rest * (cross - speedGain * variance) + gain * speedGain * noise;
		this.speedVariance[row]! += speedGain * (speedGain * (variance + noise) - 2 * cross);
	}

	/** The tracks as they are now; those nothing has happened to, and the list when that is all of them, as they came. */
	tracks(): readonly PersonTrack[] {
		if (!this.#anyChange) return this.#given;
		const tracks: PersonTrack[] = [];
		for (let row = 0; row < this.size; row += 1) {
			if (this.alive[row] === 0) continue;
			tracks.push(this.#changed[row] === 1 ? this.#trackOf(row) : this.#given[row]!);
		}
		return tracks;
	}

	#load(track: PersonTrack): number {
		const row = this.size;
		this.size += 1;
		this.alive[row] = 1;
		this.id[row] = track.id;
		this.x[row] = track.x;
		this.y[row] = track.y;
		this.vx[row] = track.vx;
		this.vy[row] = track.vy;
		this.variance[row] = track.variance;
		this.cross[row] = track.cross;
		this.speedVariance[row] = track.speedVariance;
		this.updatedAt[row] = track.updatedAt;
		this.seenAt[row] = track.seenAt;
		this.bornAt[row] = track.bornAt;
		this.hits[row] = track.hits;
		this.confirmed[row] = Number(track.confirmed);
		this.misses[row] = track.misses;
		this.closeTo[row] = track.closeTo?.id ?? NOBODY;
		this.closeSince[row] = track.closeTo?.since ?? 0;
		this.updatedBy.push(track.updatedBy);
		this.#seenBy.push(track.seenBy);
		return row;
	}

	#trackOf(row: number): PersonTrack {
		// The list is handed out, so whoever writes to the row again takes a copy first.
		this.#ownsSightings[row] = 0;
		return {
			id: this.id[row]!,
			x: this.x[row]!,
			y: this.y[row]!,
			vx: this.vx[row]!,
			vy: this.vy[row]!,
			variance: this.variance[row]!,
			cross: this.cross[row]!,
			speedVariance: this.speedVariance[row]!,
			updatedAt: this.updatedAt[row]!,
			updatedBy: this.updatedBy[row]!,
			seenAt: this.seenAt[row]!,
			bornAt: this.bornAt[row]!,
			hits: this.hits[row]!,
			confirmed: this.confirmed[row] === 1,
			seenBy: this.#seenBy[row]!,
			misses: this.misses[row]!,
			closeTo: this.closeTo[row] === NOBODY ? null : { id: this.closeTo[row]!, since: this.closeSince[row]! }
		};
	}
}

function widened<Column extends Float64Array | Int32Array | Uint8Array>(column: Column, length: number): Column {
	const wide = new (column.constructor as new (length: number) => Column)(length);
	wide.set(column);
	return wide;
}
