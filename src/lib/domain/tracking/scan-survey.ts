/** Which tracks one scan may concern: whose persons they could be, and who might have been seen and was not reported. */

import type { TrackTable } from './track-table.ts';
import {
	mapVariance,
	reachAfter,
	varianceAfter,
	type PersonMeasurement,
	type Sighting,
	type TrackerRule
} from './person-track.ts';

/** χ² with 2 degrees of freedom: five deviations. Beyond this a measurement is no unlucky reading of the same person. */
export const FAR = 25;
/** s since this robot saw the track, for which it may still follow the person through a sudden turn */
export const FOLLOW_FOR = 1;

/** Scratch space, to be used again for every scan of a batch. */
export class Survey {
	/** Tracks that any of the persons could belong to, in the order of the table, as expected at the time of the scan */
	candidates = 0;
	readonly row: Int32Array;
	readonly x: Float64Array;
	readonly y: Float64Array;
	/** m², per axis, with what the maps of two robots may differ by; without the measurement's own variance */
	readonly variance: Float64Array;
	readonly alignment: Float64Array;
	/** s from the state to the scan */
	readonly elapsed: Float64Array;
	/** Name under which this robot last reported the track, while that counts */
	readonly name: (string | null)[] = [];

	/** Tracks that are overdue or may lie in view, and where they are expected */
	inView = 0;
	readonly inViewRow: Int32Array;
	readonly inViewX: Float64Array;
	readonly inViewY: Float64Array;

	constructor(rows: number) {
		[this.row, this.inViewRow] = [new Int32Array(rows), new Int32Array(rows)];
		[this.x, this.y, this.variance] = [new Float64Array(rows), new Float64Array(rows), new Float64Array(rows)];
		[this.alignment, this.elapsed] = [new Float64Array(rows), new Float64Array(rows)];
		[this.inViewX, this.inViewY] = [new Float64Array(rows), new Float64Array(rows)];
	}
}

/** A disc outside which a robot sees nothing. */
export interface Reach {
	/** m */
	readonly x: number;
	readonly y: number;
	readonly radius: number;
}

/** Fills `survey` for a scan of `robot` at `time`. Linear in the rows of the table. */
export function surveyScan(
	survey: Survey,
	table: TrackTable,
	persons: readonly PersonMeasurement[],
	robot: string,
	time: number,
	reach: Reach | undefined,
	rule: TrackerRule
): void {
	const { alive, x, y, vx, vy, updatedAt, seenAt, confirmed, size } = table;
	const { missTimeout, confirmWithin, maxSpeed } = rule;
	const viewX = reach?.x ?? 0;
	const viewY = reach?.y ?? 0;
	const viewRadius2 = reach ? reach.radius * reach.radius : Infinity;
	let [minX, minY, maxX, maxY, noise] = [Infinity, Infinity, -Infinity, -Infinity, 0];
	for (const person of persons) {
		if (person.x < minX) minX = person.x;
		if (person.x > maxX) maxX = person.x;
		if (person.y < minY) minY = person.y;
		if (person.y > maxY) maxY = person.y;
		noise = Math.max(noise, person.sd * person.sd);
	}
	survey.candidates = 0;
	survey.inView = 0;
	for (let row = 0; row < size; row += 1) {
		if (alive[row] === 0) continue;
		const elapsed = time - updatedAt[row]!;
		const motion = reachAfter(elapsed);
		const ex = x[row]! + motion * vx[row]!;
		const ey = y[row]! + motion * vy[row]!;
		const unseenFor = time - seenAt[row]!;
		const away2 = (ex - viewX) * (ex - viewX) + (ey - viewY) * (ey - viewY);
		if (unseenFor > 0 && (away2 <= viewRadius2 || unseenFor > (confirmed[row] === 1 ? missTimeout : confirmWithin))) {
			survey.inViewRow[survey.inView] = row;
			survey.inViewX[survey.inView] = ex;
			survey.inViewY[survey.inView] = ey;
			survey.inView += 1;
		}
		const apart = Math.abs(elapsed);
		if (apart > missTimeout) continue;
		// m from the box round the persons, less what somebody who turns at once can walk
		const beyond = Math.max(minX - ex, ex - maxX, minY - ey, ey - maxY) - maxSpeed * Math.min(apart, FOLLOW_FOR);
		const variance = varianceAfter(table.variance[row]!, table.cross[row]!, table.speedVariance[row]!, elapsed, rule.q);
		const maps = mapVariance(vx[row]!, vy[row]!, rule);
		if (beyond > 0 && beyond * beyond > FAR * (variance + 2 * maps + noise)) continue;
		const e = survey.candidates;
		survey.candidates += 1;
		survey.row[e] = row;
		survey.x[e] = ex;
		survey.y[e] = ey;
		survey.elapsed[e] = elapsed;
		survey.variance[e] = variance;
		compareMaps(survey, e, table.sightings(row), maps, robot, time, rule.forgetAfter);
	}
}

/** Who has seen candidate `e` lately: under which name this robot did, and how many maps that makes. */
function compareMaps(
	survey: Survey,
	e: number,
	sightings: readonly Sighting[],
	maps: number,
	robot: string,
	time: number,
	forgetAfter: number
): void {
	let own: string | null = null;
	let others = false;
	for (let k = 0; k < sightings.length; k += 1) {
		const sighting = sightings[k]!;
		if (sighting.localId === null || time - sighting.at > forgetAfter) continue;
		if (sighting.robot === robot) own = sighting.localId;
		else others = true;
	}
	// What the maps of this robot and of those that made the track may differ by: once per robot on either side.
	const alignment = (own === null ? 2 : others ? 1 : 0) * maps;
	survey.alignment[e] = alignment;
	survey.variance[e]! += alignment;
	survey.name[e] = own;
}
