/**
 * The people of one floor as all its robots together see them: one track per person, however many robots look.
 *
 * Works on measurements, not on the robots' own tracks: each scan is matched one-to-one with the tracks as they are
 * expected at its time, so that a person two robots report is one track from the first instant on.
 */

import { diagonalCovariance, processNoise, update, type KalmanState } from './kalman.ts';
import { matchPersons } from './person-matching.ts';
import { mergeTracks, type RecentScan, type RecentScans } from './person-merging.ts';
import {
	coastTrack,
	DEFAULT_TRACKER_RULE,
	mapVariance,
	predictTrack,
	type PersonMeasurement,
	type PersonTrack,
	type Sighting,
	type TrackerRule
} from './person-track.ts';
import { chiSquareGate } from './gating.ts';

export { DEFAULT_TRACKER_RULE, predictTrack };
export type { PersonMeasurement, PersonTrack, TrackerRule };

/** What one robot saw at one time. An empty list is information: nobody is where the robot can see. */
export interface PersonScan {
	readonly robot: string;
	/** s, corrected to the server's clock */
	readonly time: number;
	readonly persons: readonly PersonMeasurement[];
	/** Could this robot see that point in this scan? */
	readonly sees: (x: number, y: number) => boolean;
}

/** A measurement that was not used, and why. */
interface DroppedMeasurement {
	readonly robot: string;
	readonly localId: string;
	readonly reason: 'not_a_number' | 'reported_twice';
}

export interface TrackerState {
	readonly tracks: readonly PersonTrack[];
	readonly nextId: number;
	/** Who was seen together lately, by robot */
	readonly scans: RecentScans;
	/** What the last scan held that could not be used */
	readonly dropped: readonly DroppedMeasurement[];
}

/** m; the same name twice in one scan this close together is one person listed twice. */
const SAME_PLACE = 0.05;
/** Scans that see nobody after which a track that was never confirmed was a glitch. */
const GLITCH_MISSES = 2;

export const startTracker = (): TrackerState => ({ tracks: [], nextId: 1, scans: new Map(), dropped: [] });

/**
 * Tracks after one more scan.
 *
 * Scans may come slightly out of order. A scan that was heard before, or is older than the robot's latest by more than
 * `lateLimit`, changes nothing. Measurements that are not finite are left out and listed in `dropped`.
 * Cost: about linear in tracks plus persons.
 */
export function stepTracker(
	state: TrackerState,
	scan: PersonScan,
	rule: TrackerRule = DEFAULT_TRACKER_RULE
): TrackerState {
	const { robot, time } = scan;
	const { persons, dropped } = usablePersons(scan, rule);
	const heard = state.scans.get(robot) ?? [];
	const latest = heard.at(-1)?.time ?? -Infinity;
	if (!Number.isFinite(time) || time < latest - rule.lateLimit || heard.some((one) => one.time === time)) {
		return { ...state, dropped };
	}

	const { trackOf, namedBefore, moved } = matchPersons(state.tracks, persons, robot, time, rule);
	const tracks: (PersonTrack | null)[] = [...state.tracks];
	let nextId = state.nextId;
	const seen = new Set<number>();
	const touched = new Set<number>();
	persons.forEach((person, j) => {
		const index = trackOf[j]!;
		const before = namedBefore[j]!;
		if (before >= 0 && before !== index) tracks[before] = withoutSighting(tracks[before]!, person, robot);
		if (index >= 0) {
			tracks[index] = withMeasurement(tracks[index]!, person, robot, time, rule);
			seen.add(tracks[index].id);
			touched.add(index);
			return;
		}
		// A name the robot has used before, now far from its track, is somebody it has followed: no glitch.
		touched.add(tracks.length);
		seen.add(nextId);
		tracks.push(newTrack(nextId, person, robot, time, moved[j] ? rule.confirmHits : 1, rule));
		nextId += 1;
	});
	for (let index = 0; index < state.tracks.length; index += 1) {
		if (!touched.has(index)) tracks[index] = withMiss(tracks[index]!, scan, state.scans, rule);
	}

	const remaining: PersonTrack[] = [];
	const measured: number[] = [];
	tracks.forEach((track, index) => {
		if (!track) return;
		if (touched.has(index)) measured.push(remaining.length);
		remaining.push(track);
	});
	const scans = withScan(state.scans, robot, { time, tracks: seen }, rule);
	const merged = mergeTracks(remaining, measured, scans, time, rule);
	return { tracks: merged.tracks, nextId, scans: merged.scans, dropped };
}

/** Tracks without those nobody can have seen for too long; call it when time passes without scans. */
export function expireTracks(state: TrackerState, now: number, rule: TrackerRule = DEFAULT_TRACKER_RULE): TrackerState {
	const tracks = state.tracks.filter(({ confirmed, seenAt }) => {
		// A time far ahead can only come from a clock that has been put right since.
		const age = now - seenAt;
		return age <= (confirmed ? rule.missTimeout : rule.confirmWithin) && age >= -rule.missTimeout;
	});
	const fresh = ({ time }: RecentScan) => Math.abs(now - time) <= rule.apartFor;
	if (tracks.length === state.tracks.length && [...state.scans.values()].every((scans) => scans.every(fresh))) {
		return state;
	}
	const scans = new Map([...state.scans].map(([robot, own]) => [robot, own.filter(fresh)] as const));
	for (const [robot, own] of scans) if (own.length === 0) scans.delete(robot);
	return { ...state, tracks, scans };
}

/** Everybody who counts as present at `now`: confirmed, and measured within `missTimeout`. */
export const confirmedTracks = (
	state: TrackerState,
	now: number,
	rule: TrackerRule = DEFAULT_TRACKER_RULE
): PersonTrack[] => state.tracks.filter(({ confirmed, seenAt }) => confirmed && now - seenAt <= rule.missTimeout);

function usablePersons({ robot, persons }: PersonScan, rule: TrackerRule) {
	const dropped: DroppedMeasurement[] = [];
	const usable: PersonMeasurement[] = [];
	const byName = new Map<string, PersonMeasurement>();
	for (const person of persons) {
		const { localId, x, y, sd } = person;
		if (!Number.isFinite(x) || !Number.isFinite(y) || !Number.isFinite(sd)) {
			dropped.push({ robot, localId, reason: 'not_a_number' });
			continue;
		}
		const twin = byName.get(localId);
		if (twin && Math.hypot(x - twin.x, y - twin.y) <= SAME_PLACE) {
			dropped.push({ robot, localId, reason: 'reported_twice' });
			continue;
		}
		byName.set(localId, person);
		usable.push(sd < rule.sdFloor ? { ...person, sd: rule.sdFloor } : person);
	}
	return { persons: usable, dropped };
}

function newTrack(
	id: number,
	person: PersonMeasurement,
	robot: string,
	time: number,
	hits: number,
	rule: TrackerRule
): PersonTrack {
	const { vx, vy, sd } = person;
	const stated = vx !== null && vy !== null && Number.isFinite(vx) && Number.isFinite(vy);
	const speedVariance = (stated ? rule.statedVelocitySd : rule.newVelocitySd) ** 2;
	return {
		id,
		x: person.x,
		y: person.y,
		vx: stated ? vx : 0,
		vy: stated ? vy : 0,
		covariance: diagonalCovariance([sd * sd, sd * sd, speedVariance, speedVariance]),
		updatedAt: time,
		updatedBy: robot,
		seenAt: time,
		bornAt: time,
		hits,
		confirmed: hits >= rule.confirmHits,
		seenBy: new Map([[robot, { localId: person.localId, at: time, x: person.x, y: person.y }]]),
		misses: 0,
		closeTo: null
	};
}

function withMeasurement(
	track: PersonTrack,
	person: PersonMeasurement,
	robot: string,
	time: number,
	rule: TrackerRule
): PersonTrack {
	const inTime = time - track.seenAt <= rule.confirmWithin;
	const hits = inTime ? track.hits + 1 : 1;
	const { x, y, vx, vy, covariance } = follow(track, person, robot, time, rule);
	const newest = time >= track.updatedAt;
	// Written out, not spread: this runs for every person of every scan.
	return {
		id: track.id,
		x,
		y,
		vx,
		vy,
		covariance,
		updatedAt: newest ? time : track.updatedAt,
		updatedBy: newest ? robot : track.updatedBy,
		seenAt: Math.max(track.seenAt, time),
		bornAt: inTime || track.confirmed ? track.bornAt : time,
		hits,
		confirmed: track.confirmed || hits >= rule.confirmHits,
		seenBy: withSighting(track.seenBy, robot, person, time, rule),
		misses: 0,
		closeTo: track.closeTo
	};
}

/** The state with one more measurement in it, at the later of the two times. */
function follow(
	track: PersonTrack,
	person: PersonMeasurement,
	robot: string,
	time: number,
	rule: TrackerRule
): KalmanState {
	const age = track.updatedAt - time;
	if (age > rule.lateLimit) return track;
	const noise = person.sd * person.sd + mapNoise(track, person, robot, time, rule);
	if (age > 0) {
		// An older look at a newer state: carried along with the person, and the less sure for it.
		const drift = track.covariance[10]! * age * age + processNoise(age, rule.q).position;
		return update(track, person.x + age * track.vx, person.y + age * track.vy, round(noise + drift)).state;
	}
	const expected = coastTrack(track, time, rule.q);
	const surprise = (person.x - expected.x) ** 2 + (person.y - expected.y) ** 2;
	// Outside the gate the person has turned more sharply than expected: trust the motion less, until it would fit.
	const fitting = (surprise / chiSquareGate(rule.gateProbability, 2) - noise) / expected.covariance[0]!;
	const covariance = fitting > 1 ? expected.covariance.map((value) => value * fitting) : expected.covariance;
	return update({ ...expected, covariance }, person.x, person.y, round(noise)).state;
}

function withSighting(
	seenBy: ReadonlyMap<string, Sighting>,
	robot: string,
	person: PersonMeasurement,
	time: number,
	{ forgetAfter }: TrackerRule
): ReadonlyMap<string, Sighting> {
	const kept = new Map(seenBy);
	for (const [name, { at }] of kept) if (time - at > forgetAfter) kept.delete(name);
	const own = kept.get(robot);
	return own && own.at > time ? kept : kept.set(robot, { localId: person.localId, at: time, x: person.x, y: person.y });
}

/**
 * m² that a measurement is the less sure because another robot's map made the track. In one instant the first robot
 * sets the place and the next ones are opinions in another map. Across instants the noise is held to what the robot
 * itself claims, so that positions it is sure of (recordings) are followed exactly.
 */
function mapNoise(
	track: PersonTrack,
	{ sd }: PersonMeasurement,
	robot: string,
	time: number,
	rule: TrackerRule
): number {
	const { alignmentSd, instant, forgetAfter } = rule;
	if (track.updatedBy !== robot && Math.abs(time - track.updatedAt) < instant) return mapVariance(track, rule);
	for (const [name, { at }] of track.seenBy) {
		if (name !== robot && time - at <= forgetAfter) return Math.min(alignmentSd, sd) ** 2;
	}
	return 0;
}

const round = (variance: number) => ({ xx: variance, xy: 0, yy: variance });

/** The robot uses this name for somebody else now. */
function withoutSighting(track: PersonTrack, { localId }: PersonMeasurement, robot: string): PersonTrack {
	if (track.seenBy.get(robot)?.localId !== localId) return track;
	const seenBy = new Map(track.seenBy);
	seenBy.delete(robot);
	return { ...track, seenBy };
}

/** The track after a scan that did not report it; null when the person is gone. */
function withMiss(
	track: PersonTrack,
	{ robot, time, sees }: PersonScan,
	scans: RecentScans,
	rule: TrackerRule
): PersonTrack | null {
	const unseenFor = time - track.seenAt;
	if (unseenFor <= 0) return track;
	if (unseenFor > (track.confirmed ? rule.missTimeout : rule.confirmWithin)) return null;
	const { x, y } = predictTrack(track, time, rule);
	if (!sees(x, y) || !mayMiss(track, robot, scans)) return track;
	const misses = track.misses + 1;
	const gone = track.confirmed ? misses >= rule.missesToDelete || unseenFor >= rule.missedFor : misses >= GLITCH_MISSES;
	return gone ? null : { ...track, misses };
}

/**
 * Somebody may stand between this robot and the person. So it only counts as a miss when the robot has seen the person
 * before, or when every robot that has seen them has looked again in vain.
 */
function mayMiss(track: PersonTrack, robot: string, scans: RecentScans): boolean {
	if (track.seenBy.has(robot)) return true;
	for (const [name, { at }] of track.seenBy) {
		if (!((scans.get(name)?.at(-1)?.time ?? Infinity) > at)) return false;
	}
	return true;
}

function withScan(scans: RecentScans, robot: string, scan: RecentScan, rule: TrackerRule): RecentScans {
	const own = (scans.get(robot) ?? []).filter(({ time }) => scan.time - time <= rule.apartFor);
	const after = own.findIndex(({ time }) => time > scan.time);
	own.splice(after < 0 ? own.length : after, 0, scan);
	return new Map(scans).set(robot, own);
}
