/** What one measurement does to the track it belongs to. */

import { processNoise } from './kalman.ts';
import { mapVariance, type PersonMeasurement, type TrackerRule } from './person-track.ts';
import type { TrackTable } from './track-table.ts';

/**
 * Puts a measurement of `robot` at `time` into a row.
 *
 * @param gate largest squared Mahalanobis distance that passes without doubt
 */
export function takeMeasurement(
	table: TrackTable,
	row: number,
	person: PersonMeasurement,
	robot: string,
	time: number,
	gate: number,
	rule: TrackerRule
): void {
	const { updatedAt, seenAt, hits, confirmed } = table;
	follow(table, row, person, robot, time, gate, rule);
	if (time >= updatedAt[row]!) {
		updatedAt[row] = time;
		table.updatedBy[row] = robot;
	}
	const inTime = time - seenAt[row]! <= rule.confirmWithin;
	if (!inTime && confirmed[row] === 0) table.bornAt[row] = time;
	hits[row] = inTime ? hits[row]! + 1 : 1;
	if (hits[row]! >= rule.confirmHits) confirmed[row] = 1;
	seenAt[row] = Math.max(seenAt[row]!, time);
	table.misses[row] = 0;
	addSighting(table, row, robot, person.localId, time, rule);
}

/** Brings the state to the later of the two times with the measurement in it. */
function follow(
	table: TrackTable,
	row: number,
	{ x, y, sd, vx, vy }: PersonMeasurement,
	robot: string,
	time: number,
	gate: number,
	rule: TrackerRule
): void {
	const age = table.updatedAt[row]! - time;
	if (age > rule.lateLimit) return;
	const noise = sd * sd + mapNoise(table, row, sd, robot, time, rule);
	if (age > 0) {
		// An older look at a newer state: carried along with the person, and the less sure for it.
		const drift = table.speedVariance[row]! * age * age + processNoise(age, rule.q).position;
		table.correct(row, x + age * table.vx[row]!, y + age * table.vy[row]!, noise + drift);
		return;
	}
	table.carry(row, time, rule.q);
	const dx = x - table.x[row]!;
	const dy = y - table.y[row]!;
	// Outside the gate the person has turned more sharply than expected: trust the motion less, until it would fit.
	const fitting = ((dx * dx + dy * dy) / gate - noise) / table.variance[row]!;
	if (fitting > 1) {
		table.variance[row]! *= fitting;
		table.cross[row]! *= fitting;
		table.speedVariance[row]! *= fitting;
	}
	table.correct(row, x, y, noise);
	if (vx !== null && vy !== null && Number.isFinite(vx) && Number.isFinite(vy)) {
		correctVelocity(table, row, vx, vy, rule.statedVelocitySd ** 2);
	}
}

/** Takes a velocity the robot states as a measurement of its own: places alone leave it unsure by 0.3 m/s. */
function correctVelocity(table: TrackTable, row: number, vx: number, vy: number, noise: number): void {
	const cross = table.cross[row]!;
	const total = table.speedVariance[row]! + noise;
	const share = table.speedVariance[row]! / total;
	const dx = vx - table.vx[row]!;
	const dy = vy - table.vy[row]!;
	table.x[row]! += (cross / total) * dx;
	table.y[row]! += (cross / total) * dy;
	table.vx[row]! += share * dx;
	table.vy[row]! += share * dy;
	table.variance[row]! -= (cross * cross) / total;
	table.cross[row]! *= noise / total;
	table.speedVariance[row]! *= noise / total;
}

/**
 * m² that a measurement is the less sure because another robot's map made the track. In one instant the first robot
 * sets the place and the next ones are opinions in another map. Across instants the noise is held to what the robot
 * itself claims, so that positions it is sure of (recordings) are followed exactly.
 */
function mapNoise(table: TrackTable, row: number, sd: number, robot: string, time: number, rule: TrackerRule): number {
	if (table.updatedBy[row] !== robot && Math.abs(time - table.updatedAt[row]!) < rule.instant) {
		return mapVariance(table.vx[row]!, table.vy[row]!, rule);
	}
	for (const sighting of table.sightings(row)) {
		if (sighting.localId !== null && sighting.robot !== robot && time - sighting.at <= rule.forgetAfter) {
			return Math.min(rule.alignmentSd, sd) ** 2;
		}
	}
	return 0;
}

/** Keeps one sighting per robot: named while it follows the person, nameless while it matters whom it saw beside them. */
function addSighting(
	table: TrackTable,
	row: number,
	robot: string,
	localId: string,
	time: number,
	{ forgetAfter, apartFor, lateLimit }: TrackerRule
): void {
	const seenBy = table.ownSightings(row);
	let kept = 0;
	let own = -1;
	for (let k = 0; k < seenBy.length; k += 1) {
		let sighting = seenBy[k]!;
		const age = time - sighting.at;
		if (sighting.robot === robot) own = kept;
		else if (age > forgetAfter && age > apartFor + lateLimit) continue;
		else if (age > forgetAfter && sighting.localId !== null) sighting = { ...sighting, localId: null };
		seenBy[kept] = sighting;
		kept += 1;
	}
	seenBy.length = kept;
	if (own < 0) seenBy.push({ robot, localId, at: time });
	else if (seenBy[own]!.localId === null || seenBy[own]!.at <= time) seenBy[own] = { robot, localId, at: time };
}

/** The robot uses this name for somebody else now. */
export function withdrawName(table: TrackTable, row: number, localId: string, robot: string): void {
	const at = table.sightings(row).findIndex((sighting) => sighting.robot === robot && sighting.localId === localId);
	if (at < 0) return;
	const seenBy = table.ownSightings(row);
	seenBy[at] = { ...seenBy[at]!, localId: null };
}
