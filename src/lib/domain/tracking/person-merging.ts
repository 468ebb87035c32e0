/** Two tracks that turn out to be one person. */

import { fuseCorrelated } from './fusion.ts';
import { chiSquareGate } from './gating.ts';
import { coastTrack, mapVariance, predictTrack, type PersonTrack, type TrackerRule } from './person-track.ts';

/** One scan as the tracker remembers it: which tracks the robot saw in it. */
export interface RecentScan {
	readonly time: number;
	readonly tracks: ReadonlySet<number>;
}

/** By robot, newest last. */
export type RecentScans = ReadonlyMap<string, readonly RecentScan[]>;

/** m/s, difference in velocity that two tracks of one person may have beside their own uncertainty */
const VELOCITY_SLACK = 0.3;
/** s since the last measurement after which a track is too vague to be told from its neighbours */
const FRESH = 0.6;
/** m nobody walks beyond within FRESH, with room for the distance at which tracks merge */
const STRIDE = 2.5;

export interface Merged {
	readonly tracks: PersonTrack[];
	readonly scans: RecentScans;
}

/**
 * Merges what has become one person: tracks in the same place with like velocity that no robot has seen apart of late.
 * When both are established they must also have stayed together for `mergeAfter`, so that people who cross or pass each
 * other, each seen by another robot, stay two.
 *
 * @param touched indices of the tracks the present scan has measured; every pair looked at has one of them
 */
export function mergeTracks(
	tracks: readonly PersonTrack[],
	touched: readonly number[],
	scans: RecentScans,
	time: number,
	rule: TrackerRule
): Merged {
	const list: (PersonTrack | null)[] = [...tracks];
	const measured = new Set(touched);
	const others = othersNear(tracks, touched, measured, time);
	let recent = scans;
	for (const index of touched) {
		const track = list[index]!;
		const near = nearestTwin(track, list, others, recent, rule);
		if (near < 0) {
			if (track.closeTo && !staysClose(track, list, rule)) list[index] = { ...track, closeTo: null };
			continue;
		}
		const twin = list[near]!;
		const since = track.closeTo?.id === twin.id ? track.closeTo.since : time;
		const established = time - Math.max(track.bornAt, twin.bornAt) >= rule.mergeAfter;
		if (established && time - since < rule.mergeAfter) {
			list[index] = { ...track, closeTo: { id: twin.id, since } };
			continue;
		}
		const merged = mergePair(track, twin, rule);
		list[index] = merged;
		list[near] = null;
		recent = renameInScans(recent, Math.max(track.id, twin.id), merged.id);
	}
	return { tracks: list.filter((track) => track !== null), scans: recent };
}

/** Tracks that any of the touched ones could be merged with. */
function othersNear(
	tracks: readonly PersonTrack[],
	touched: readonly number[],
	measured: ReadonlySet<number>,
	time: number
): number[] {
	let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity];
	for (const index of touched) {
		const { x, y } = tracks[index]!;
		if (x < minX) minX = x;
		if (x > maxX) maxX = x;
		if (y < minY) minY = y;
		if (y > maxY) maxY = y;
	}
	const others: number[] = [];
	for (let index = 0; index < tracks.length; index += 1) {
		const { x, y, seenAt } = tracks[index]!;
		if (x < minX - STRIDE || x > maxX + STRIDE || y < minY - STRIDE || y > maxY + STRIDE) continue;
		if (time - seenAt <= FRESH && !measured.has(index)) others.push(index);
	}
	return others;
}

function nearestTwin(
	track: PersonTrack,
	list: readonly (PersonTrack | null)[],
	others: readonly number[],
	scans: RecentScans,
	rule: TrackerRule
): number {
	const gate = chiSquareGate(rule.gateProbability, 2);
	let nearest = -1;
	let nearestAt = rule.mergeWithin;
	for (const index of others) {
		const other = list[index];
		if (!other || Math.abs(other.x - track.x) > STRIDE || Math.abs(other.y - track.y) > STRIDE) continue;
		const there = predictTrack(other, track.updatedAt, rule);
		const distance = Math.hypot(there.x - track.x, there.y - track.y);
		if (distance >= nearestAt) continue;
		const variance = track.covariance[0]! + there.variance + 2 * mapVariance(track, rule);
		if (distance * distance > gate * variance) continue;
		const slip = Math.hypot(there.vx - track.vx, there.vy - track.vy);
		const slack = track.covariance[10]! + other.covariance[10]! + VELOCITY_SLACK * VELOCITY_SLACK;
		if (slip * slip > gate * slack || seenApart(track, other, scans, track.updatedAt - rule.apartFor)) continue;
		nearest = index;
		nearestAt = distance;
	}
	return nearest;
}

/** A noisy reading or two does not end it: only being clearly apart does. */
function staysClose(
	{ x, y, closeTo, updatedAt }: PersonTrack,
	list: readonly (PersonTrack | null)[],
	rule: TrackerRule
) {
	const other = list.find((candidate) => candidate?.id === closeTo?.id);
	if (!other) return false;
	const there = predictTrack(other, updatedAt, rule);
	return Math.hypot(there.x - x, there.y - y) < 2 * rule.mergeWithin;
}

/** Did any robot report both in one scan since then? */
function seenApart(a: PersonTrack, b: PersonTrack, scans: RecentScans, since: number): boolean {
	for (const own of scans.values()) {
		for (let k = own.length - 1; k >= 0 && own[k]!.time >= since; k -= 1) {
			if (own[k]!.tracks.has(a.id) && own[k]!.tracks.has(b.id)) return true;
		}
	}
	return false;
}

/**
 * One track from two, under the name of the older. What each knows may come from the same reports, so they are fused by
 * covariance intersection, axis by axis on position and speed.
 */
function mergePair(a: PersonTrack, b: PersonTrack, rule: TrackerRule): PersonTrack {
	const [older, newer] = a.id < b.id ? [a, b] : [b, a];
	const updatedAt = Math.max(a.updatedAt, b.updatedAt);
	const [p, q] = [coastTrack(a, updatedAt, rule.q), coastTrack(b, updatedAt, rule.q)];
	const axis = (of: typeof p, position: number, speed: number) => ({
		x: position,
		y: speed,
		covariance: { xx: of.covariance[0]!, xy: of.covariance[2]!, yy: of.covariance[10]! }
	});
	const alongX = fuseCorrelated(axis(p, p.x, p.vx), axis(q, q.x, q.vx));
	const alongY = fuseCorrelated(axis(p, p.y, p.vy), axis(q, q.y, q.vy));
	const covariance = new Float64Array(16);
	[alongX, alongY].forEach(({ covariance: { xx, xy, yy } }, k) => {
		covariance[k * 5] = xx;
		covariance[k * 5 + 2] = xy;
		covariance[k * 5 + 8] = xy;
		covariance[k * 5 + 10] = yy;
	});
	const seenBy = new Map(newer.seenBy);
	for (const [robot, sighting] of older.seenBy) {
		if (sighting.at >= (seenBy.get(robot)?.at ?? -Infinity)) seenBy.set(robot, sighting);
	}
	return {
		...older,
		x: alongX.x,
		y: alongY.x,
		vx: alongX.y,
		vy: alongY.y,
		covariance,
		updatedAt,
		updatedBy: a.updatedAt >= b.updatedAt ? a.updatedBy : b.updatedBy,
		seenAt: Math.max(a.seenAt, b.seenAt),
		bornAt: Math.min(a.bornAt, b.bornAt),
		hits: a.hits + b.hits,
		confirmed: a.confirmed || b.confirmed,
		seenBy,
		misses: Math.min(a.misses, b.misses),
		closeTo: null
	};
}

/** Who was seen apart from the track that goes was seen apart from the one that stays. */
function renameInScans(scans: RecentScans, gone: number, stays: number): RecentScans {
	const rename = (scan: RecentScan): RecentScan => {
		if (!scan.tracks.has(gone)) return scan;
		const tracks = new Set(scan.tracks).add(stays);
		tracks.delete(gone);
		return { ...scan, tracks };
	};
	return new Map([...scans].map(([robot, own]) => [robot, own.map(rename)]));
}
