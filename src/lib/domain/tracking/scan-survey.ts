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
	row = new Int32Array(0);
	x = new Float64Array(0);
	y = new Float64Array(0);
	/** m², per axis, with what the maps of two robots may differ by; without the measurement's own variance */
	variance = new Float64Array(0);
	alignment = new Float64Array(0);
	/** s from the state to the scan */
	elapsed = new Float64Array(0);
	/** Name under which this robot last reported the track, while that counts */
	readonly name: (string | null)[] = [];

	/** Tracks that are overdue or may lie in view, and where they are expected */
	inView = 0;
	inViewRow = new Int32Array(0);
	inViewX = new Float64Array(0);
	inViewY = new Float64Array(0);

	/** By row of the table: m round its place that matter at the time of its state, and m more per s before or after */
	slack = new Float64Array(0);
	rush = new Float64Array(0);

	/** Makes room for a table of `rows` rows. */
	reserve(rows: number): void {
		if (rows <= this.slack.length) return;
		const { slack, rush } = this;
		[this.row, this.inViewRow] = [new Int32Array(rows), new Int32Array(rows)];
		[this.x, this.y, this.variance] = [new Float64Array(rows), new Float64Array(rows), new Float64Array(rows)];
		[this.alignment, this.elapsed] = [new Float64Array(rows), new Float64Array(rows)];
		[this.inViewX, this.inViewY] = [new Float64Array(rows), new Float64Array(rows)];
		[this.slack, this.rush] = [new Float64Array(rows), new Float64Array(rows)];
		this.slack.set(slack);
		this.rush.set(rush);
	}
}

/** A disc outside which a robot sees nothing. */
export interface Reach {
	/** m */
	readonly x: number;
	readonly y: number;
	readonly radius: number;
}

/** m; well above what rounding does to a place on a floor */
const ROUNDING = 1e-6;

/** To be called for every row whose state is new, before the next scan. */
export function boundRow(survey: Survey, table: TrackTable, row: number, rule: TrackerRule): void {
	const vx = table.vx[row]!;
	const vy = table.vy[row]!;
	// √(a + b) ≤ √a + √b, and a covariance is at most the product of the deviations, so the deviation of a position
	// grows by no more than so much per second.
	survey.slack[row] = Math.sqrt(FAR * (table.variance[row]! + 2 * mapVariance(vx, vy, rule))) + ROUNDING;
	survey.rush[row] =
		Math.sqrt(FAR * table.speedVariance[row]!) +
		Math.sqrt((FAR * rule.q * rule.missTimeout) / 3) +
		Math.sqrt(vx * vx + vy * vy) +
		rule.maxSpeed;
}

/** What the rows of a table are held against. */
interface Look {
	readonly robot: string;
	readonly time: number;
	readonly reach: Reach | undefined;
	/** Box round the persons, m; turned inside out when there are none */
	readonly minX: number;
	readonly minY: number;
	readonly maxX: number;
	readonly maxY: number;
	/** m², largest variance of a measurement */
	readonly noise: number;
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
	let [minX, minY, maxX, maxY, noise] = [Infinity, Infinity, -Infinity, -Infinity, 0];
	for (const person of persons) {
		if (person.x < minX) minX = person.x;
		if (person.x > maxX) maxX = person.x;
		if (person.y < minY) minY = person.y;
		if (person.y > maxY) maxY = person.y;
		noise = Math.max(noise, person.sd * person.sd);
	}
	const look: Look = { robot, time, reach, minX, minY, maxX, maxY, noise };
	survey.candidates = 0;
	survey.inView = 0;
	const { x, y, updatedAt, seenAt, alive, size } = table;
	const { slack, rush } = survey;
	// Most of the floor is far from any one robot: what lies clear of both the persons and the view is passed over here.
	const margin = Math.sqrt(FAR * noise);
	const radius = reach?.radius ?? Infinity;
	const left = Math.min(minX, (reach?.x ?? 0) - radius) - margin;
	const right = Math.max(maxX, (reach?.x ?? 0) + radius) + margin;
	const low = Math.min(minY, (reach?.y ?? 0) - radius) - margin;
	const high = Math.max(maxY, (reach?.y ?? 0) + radius) + margin;
	const patience = Math.min(rule.missTimeout, rule.confirmWithin);
	for (let row = 0; row < size; row += 1) {
		const px = x[row]!;
		const py = y[row]!;
		const room = slack[row]! + rush[row]! * Math.abs(time - updatedAt[row]!);
		const clear = px < left - room || px > right + room || py < low - room || py > high + room;
		if (alive[row] === 0 || (clear && time - seenAt[row]! <= patience)) continue;
		surveyRow(survey, table, row, look, rule);
	}
}

function surveyRow(survey: Survey, table: TrackTable, row: number, look: Look, rule: TrackerRule): void {
	const { time, reach } = look;
	const vx = table.vx[row]!;
	const vy = table.vy[row]!;
	const elapsed = time - table.updatedAt[row]!;
	const motion = reachAfter(elapsed);
	const x = table.x[row]! + motion * vx;
	const y = table.y[row]! + motion * vy;
	const unseenFor = time - table.seenAt[row]!;
	if (unseenFor > 0) {
		const timeout = table.confirmed[row] === 1 ? rule.missTimeout : rule.confirmWithin;
		const isNear =
			!reach || (x - reach.x) * (x - reach.x) + (y - reach.y) * (y - reach.y) <= reach.radius * reach.radius;
		if (isNear || unseenFor > timeout) {
			const k = survey.inView;
			survey.inView += 1;
			survey.inViewRow[k] = row;
			survey.inViewX[k] = x;
			survey.inViewY[k] = y;
		}
	}
	const apart = Math.abs(elapsed);
	if (apart > rule.missTimeout) return;
	// m from the box round the persons, less what somebody who turns at once can walk
	const away = Math.max(look.minX - x, x - look.maxX, look.minY - y, y - look.maxY);
	const beyond = away - rule.maxSpeed * Math.min(apart, FOLLOW_FOR);
	const variance = varianceAfter(table.variance[row]!, table.cross[row]!, table.speedVariance[row]!, elapsed, rule.q);
	const maps = mapVariance(vx, vy, rule);
	if (beyond > 0 && beyond * beyond > FAR * (variance + 2 * maps + look.noise)) return;
	const e = survey.candidates;
	survey.candidates += 1;
	survey.row[e] = row;
	survey.x[e] = x;
	survey.y[e] = y;
	survey.elapsed[e] = elapsed;
	survey.variance[e] = variance;
	compareMaps(survey, e, table.sightings(row), maps, look.robot, time, rule.forgetAfter);
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
