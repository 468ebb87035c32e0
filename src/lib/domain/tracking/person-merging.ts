/** Two tracks that turn out to be one person. */

import { fuseCorrelated } from './fusion.ts';
import {
	mapVariance,
	reachAfter,
	speedLeftAfter,
	varianceAfter,
	type Sighting,
	type TrackerRule
} from './person-track.ts';
import { NOBODY, type TrackTable } from './track-table.ts';

/** One scan as the tracker remembers it: which tracks the robot saw in it. */
export interface RecentScan {
	readonly time: number;
	/** Ids */
	readonly tracks: readonly number[];
}

/** By robot, newest last. */
export type RecentScans = ReadonlyMap<string, readonly RecentScan[]>;

/** m/s, difference in velocity that two tracks of one person may have beside their own uncertainty */
const VELOCITY_SLACK = 0.3;
/** s since the last measurement after which a track is too vague to be told from its neighbours */
const FRESH = 0.6;
/** m nobody walks beyond within FRESH, with room for the distance at which tracks merge */
const STRIDE = 2.5;

/**
 * Merges what has become one person: tracks in the same place with like velocity that no robot has seen apart of late.
 * When both are established they must also have stayed together for `mergeAfter`, so that people who cross or pass each
 * other, each seen by another robot, stay two. Changes rows of `table` and entries of `scans`.
 *
 * @param touched rows the present scan has measured; every pair looked at has one of them
 */
export function mergeTracks(
	table: TrackTable,
	touched: readonly number[],
	scans: Map<string, readonly RecentScan[]>,
	time: number,
	gate: number,
	rule: TrackerRule
): void {
	const others = othersNear(table, touched, time);
	for (const row of touched) {
		const near = nearestTwin(table, row, others, scans, gate, rule);
		if (near < 0) {
			if (table.closeTo[row] !== NOBODY && !staysClose(table, row, rule)) setCloseTo(table, row, NOBODY, 0);
			continue;
		}
		const since = table.closeTo[row] === table.id[near] ? table.closeSince[row]! : time;
		const established = time - Math.max(table.bornAt[row]!, table.bornAt[near]!) >= rule.mergeAfter;
		if (established && time - since < rule.mergeAfter) {
			setCloseTo(table, row, table.id[near]!, since);
			continue;
		}
		const stays = Math.min(table.id[row]!, table.id[near]!);
		const goes = Math.max(table.id[row]!, table.id[near]!);
		mergePair(table, row, near, rule);
		renameInScans(scans, table.sightings(row), goes, stays);
	}
}

function setCloseTo(table: TrackTable, row: number, id: number, since: number): void {
	table.closeTo[row] = id;
	table.closeSince[row] = since;
	table.markChanged(row);
}

/** Rows that any of the touched ones could be merged with. */
function othersNear(table: TrackTable, touched: readonly number[], time: number): number[] {
	const { x, y, seenAt, alive, measuredIn, size } = table;
	const others: number[] = [];
	if (touched.length === 0) return others;
	let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity];
	for (const row of touched) {
		minX = Math.min(minX, x[row]!);
		maxX = Math.max(maxX, x[row]!);
		minY = Math.min(minY, y[row]!);
		maxY = Math.max(maxY, y[row]!);
	}
	const present = measuredIn[touched[0]!];
	for (let row = 0; row < size; row += 1) {
		if (x[row]! < minX - STRIDE || x[row]! > maxX + STRIDE || y[row]! < minY - STRIDE || y[row]! > maxY + STRIDE)
			continue;
		if (time - seenAt[row]! <= FRESH && alive[row] === 1 && measuredIn[row] !== present) others.push(row);
	}
	return others;
}

function nearestTwin(
	table: TrackTable,
	row: number,
	others: readonly number[],
	scans: RecentScans,
	gate: number,
	rule: TrackerRule
): number {
	const { x, y, vx, vy, variance, cross, speedVariance, updatedAt, alive } = table;
	const ownX = x[row]!;
	const ownY = y[row]!;
	const time = updatedAt[row]!;
	let nearest = -1;
	let nearest2 = rule.mergeWithin * rule.mergeWithin;
	for (let k = 0; k < others.length; k += 1) {
		const other = others[k]!;
		if (Math.abs(x[other]! - ownX) > STRIDE || Math.abs(y[other]! - ownY) > STRIDE || alive[other] === 0) continue;
		const dt = time - updatedAt[other]!;
		const reach = reachAfter(dt);
		const dx = x[other]! + reach * vx[other]! - ownX;
		const dy = y[other]! + reach * vy[other]! - ownY;
		const distance2 = dx * dx + dy * dy;
		if (distance2 >= nearest2) continue;
		const there = varianceAfter(variance[other]!, cross[other]!, speedVariance[other]!, dt, rule.q);
		if (distance2 > gate * (variance[row]! + there + 2 * mapVariance(vx[row]!, vy[row]!, rule))) continue;
		const left = speedLeftAfter(dt);
		const slip = Math.hypot(left * vx[other]! - vx[row]!, left * vy[other]! - vy[row]!);
		const slack = speedVariance[row]! + speedVariance[other]! + VELOCITY_SLACK * VELOCITY_SLACK;
		if (slip * slip > gate * slack || seenApart(table, row, other, scans, time - rule.apartFor)) continue;
		nearest = other;
		nearest2 = distance2;
	}
	return nearest;
}

/** A noisy reading or two does not end it: only being clearly apart does. */
function staysClose(table: TrackTable, row: number, rule: TrackerRule): boolean {
	const { x, y, vx, vy, updatedAt } = table;
	const other = table.rowOf(table.closeTo[row]!);
	if (other < 0) return false;
	const reach = reachAfter(updatedAt[row]! - updatedAt[other]!);
	const distance = Math.hypot(x[other]! + reach * vx[other]! - x[row]!, y[other]! + reach * vy[other]! - y[row]!);
	return distance < 2 * rule.mergeWithin;
}

/** Did any robot report both in one scan since then? Only those with a sighting of both can have. */
function seenApart(table: TrackTable, a: number, b: number, scans: RecentScans, since: number): boolean {
	const others = table.sightings(b);
	for (const { robot } of table.sightings(a)) {
		if (!others.some((sighting) => sighting.robot === robot)) continue;
		const own = scans.get(robot) ?? [];
		for (let k = own.length - 1; k >= 0 && own[k]!.time >= since; k -= 1) {
			const { tracks } = own[k]!;
			if (tracks.includes(table.id[a]!) && tracks.includes(table.id[b]!)) return true;
		}
	}
	return false;
}

/**
 * Makes one track of two in the row of the first, under the name of the older. What each knows may come from the same
 * reports, so they are fused by covariance intersection, axis by axis on position and speed.
 */
function mergePair(table: TrackTable, row: number, near: number, rule: TrackerRule): void {
	const { id, x, y, vx, vy, variance, cross, speedVariance, updatedAt, updatedBy, seenAt, bornAt } = table;
	const older = id[row]! < id[near]! ? row : near;
	const newer = older === row ? near : row;
	const seenBy = joinSightings(table.sightings(older), table.sightings(newer));
	const latest = Math.max(updatedAt[row]!, updatedAt[near]!);
	table.carry(row, latest, rule.q);
	table.carry(near, latest, rule.q);
	const axis = (of: number, position: number, speed: number) => ({
		x: position,
		y: speed,
		covariance: { xx: variance[of]!, xy: cross[of]!, yy: speedVariance[of]! }
	});
	const alongX = fuseCorrelated(axis(row, x[row]!, vx[row]!), axis(near, x[near]!, vx[near]!));
	const alongY = fuseCorrelated(axis(row, y[row]!, vy[row]!), axis(near, y[near]!, vy[near]!));
	[x[row], vx[row], y[row], vy[row]] = [alongX.x, alongX.y, alongY.x, alongY.y];
	// The same for both axes, because what went in was.
	const fused = alongX.covariance;
	[variance[row], cross[row], speedVariance[row]] = [fused.xx, fused.xy, fused.yy];
	if (updatedAt[row]! < latest) updatedBy[row] = updatedBy[near]!;
	updatedAt[row] = latest;
	seenAt[row] = Math.max(seenAt[row]!, seenAt[near]!);
	bornAt[row] = Math.min(bornAt[row]!, bornAt[near]!);
	table.hits[row]! += table.hits[near]!;
	table.confirmed[row] = Math.max(table.confirmed[row]!, table.confirmed[near]!);
	table.misses[row] = Math.min(table.misses[row]!, table.misses[near]!);
	id[row] = id[older]!;
	table.ownSightings(row).splice(0, Infinity, ...seenBy);
	setCloseTo(table, row, NOBODY, 0);
	table.remove(near);
}

/** One sighting per robot: the one that still counts, then the later, then the older track's. */
function joinSightings(older: readonly Sighting[], newer: readonly Sighting[]): Sighting[] {
	const worth = ({ localId, at }: Sighting) => (localId === null ? -Infinity : at);
	const kept = newer.filter((one) => !older.some((own) => own.robot === one.robot && worth(own) >= worth(one)));
	return [...kept, ...older.filter((own) => !kept.some((one) => one.robot === own.robot))];
}

/** Who was seen apart from the track that goes was seen apart from the one that stays. */
function renameInScans(
	scans: Map<string, readonly RecentScan[]>,
	sightings: readonly Sighting[],
	goes: number,
	stays: number
): void {
	const rename = (scan: RecentScan): RecentScan => {
		if (!scan.tracks.includes(goes)) return scan;
		const { time, tracks } = scan;
		return { time, tracks: [...tracks.filter((id) => id !== goes && id !== stays), stays] };
	};
	for (const { robot } of sightings) {
		const own = scans.get(robot);
		if (own) scans.set(robot, own.map(rename));
	}
}
