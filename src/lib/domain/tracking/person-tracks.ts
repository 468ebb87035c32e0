/**
 * The people of one floor as all its robots together see them: one track per person, however many robots look.
 *
 * Works on measurements, not on the robots' own tracks: each scan is matched one-to-one with the tracks as they are
 * expected at its time, so that a person two robots report is one track from the first instant on.
 */

import { chiSquareGate } from './gating.ts';
import { takeMeasurement, withdrawName } from './measurement.ts';
import { matchPersons } from './person-matching.ts';
import { mergeTracks, type RecentScan, type RecentScans } from './person-merging.ts';
import {
	DEFAULT_TRACKER_RULE,
	predictTrack,
	type PersonMeasurement,
	type PersonTrack,
	type Sighting,
	type TrackerRule
} from './person-track.ts';
import { boundRow, Survey, surveyScan, type Reach } from './scan-survey.ts';
import { TrackTable } from './track-table.ts';

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
	/** Where `sees` can be true at all; saves asking for everybody on the floor. Left out, anywhere. */
	readonly reach?: Reach;
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
	/** What the scans of the last step held that could not be used */
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
 * Cost: linear in tracks plus persons; many scans cost much less with `stepTrackerAll`.
 */
export const stepTracker = (
	state: TrackerState,
	scan: PersonScan,
	rule: TrackerRule = DEFAULT_TRACKER_RULE
): TrackerState => stepTrackerAll(state, [scan], rule);

/** Tracks after some more scans, taken in one by one in the order given; the same as that many calls of `stepTracker`. */
export function stepTrackerAll(
	state: TrackerState,
	scans: readonly PersonScan[],
	rule: TrackerRule = DEFAULT_TRACKER_RULE
): TrackerState {
	if (scans.length === 0) return state;
	const table = new TrackTable(state.tracks);
	const survey = new Survey();
	survey.reserve(table.capacity);
	for (let row = 0; row < table.size; row += 1) boundRow(survey, table, row, rule);
	const batch: Batch = {
		rule,
		gate: chiSquareGate(rule.gateProbability, 2),
		table,
		survey,
		scans: new Map(state.scans),
		dropped: [],
		nextId: state.nextId,
		taken: 0
	};
	for (const scan of scans) takeScan(batch, scan);
	return {
		tracks: table.tracks(),
		nextId: batch.nextId,
		scans: batch.taken > 0 ? batch.scans : state.scans,
		dropped: batch.dropped
	};
}

/** What is worked on while scans are taken in; nothing of it belongs to the state that was given. */
interface Batch {
	readonly rule: TrackerRule;
	/** Largest squared Mahalanobis distance of a pair */
	readonly gate: number;
	readonly table: TrackTable;
	readonly survey: Survey;
	readonly scans: Map<string, readonly RecentScan[]>;
	readonly dropped: DroppedMeasurement[];
	nextId: number;
	/** Number of scans taken in */
	taken: number;
}

function takeScan(batch: Batch, scan: PersonScan): void {
	const { rule, gate, table, survey, scans } = batch;
	const { robot, time } = scan;
	const { persons, names } = usablePersons(scan, rule, batch.dropped);
	const heard = scans.get(robot) ?? [];
	const latest = heard.at(-1)?.time ?? -Infinity;
	if (!Number.isFinite(time) || time < latest - rule.lateLimit || heard.some((one) => one.time === time)) return;
	batch.taken += 1;
	table.reserve(persons.length);
	survey.reserve(table.capacity);

	surveyScan(survey, table, persons, robot, time, scan.reach, rule);
	const { trackOf, namedBefore, moved } = matchPersons(survey, table, persons, names, gate, rule);
	const known = table.size;
	for (let j = 0; j < persons.length; j += 1) {
		const person = persons[j]!;
		const row = trackOf[j]!;
		const before = namedBefore[j]!;
		if (before >= 0 && before !== row) withdrawName(table, before, person.localId, robot);
		if (row >= 0) {
			takeMeasurement(table, row, person, robot, time, gate, rule);
			table.measuredIn[row] = batch.taken;
			continue;
		}
		// A name the robot has used before, now far from its track, is somebody it has followed: no glitch.
		const hits = moved[j] === 1 ? rule.confirmHits : 1;
		table.measuredIn[table.add(newTrack(batch.nextId, person, robot, time, hits, rule))] = batch.taken;
		batch.nextId += 1;
	}
	takeMisses(batch, scan);

	const touched: number[] = [];
	for (let e = 0; e < survey.candidates; e += 1) {
		if (table.measuredIn[survey.row[e]!] === batch.taken) touched.push(survey.row[e]!);
	}
	for (let row = known; row < table.size; row += 1) touched.push(row);
	const tracks = touched.map((row) => table.id[row]!);
	scans.set(robot, withScan(heard, { time, tracks }, rule));
	mergeTracks(table, touched, scans, time, gate, rule);
	for (const row of touched) boundRow(survey, table, row, rule);
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

/** Number of robots that have reported the person within `within` s before `now`. */
export function countSeeing({ seenBy }: PersonTrack, now: number, within: number): number {
	let count = 0;
	for (const { localId, at } of seenBy) if (localId !== null && now - at <= within) count += 1;
	return count;
}

/** Persons whose numbers can be used, each once, and the index of the last one of each name. */
function usablePersons({ robot, persons }: PersonScan, rule: TrackerRule, dropped: DroppedMeasurement[]) {
	const usable: PersonMeasurement[] = [];
	const names = new Map<string, number>();
	for (const person of persons) {
		const { localId, x, y, sd } = person;
		if (!Number.isFinite(x) || !Number.isFinite(y) || !Number.isFinite(sd)) {
			dropped.push({ robot, localId, reason: 'not_a_number' });
			continue;
		}
		const index = names.get(localId);
		const twin = index === undefined ? undefined : usable[index];
		if (twin && Math.hypot(x - twin.x, y - twin.y) <= SAME_PLACE) {
			dropped.push({ robot, localId, reason: 'reported_twice' });
			continue;
		}
		names.set(localId, usable.length);
		usable.push(sd < rule.sdFloor ? { ...person, sd: rule.sdFloor } : person);
	}
	return { persons: usable, names };
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
		variance: sd * sd,
		cross: 0,
		speedVariance,
		updatedAt: time,
		updatedBy: robot,
		seenAt: time,
		bornAt: time,
		hits,
		confirmed: hits >= rule.confirmHits,
		seenBy: [{ robot, localId: person.localId, at: time }],
		misses: 0,
		closeTo: null
	};
}

/** Counts a miss for everybody the robot must have seen and did not report, and removes those who are gone. */
function takeMisses({ table, survey, scans, rule, taken }: Batch, { robot, time, sees }: PersonScan): void {
	for (let k = 0; k < survey.inView; k += 1) {
		const row = survey.inViewRow[k]!;
		if (table.measuredIn[row] === taken) continue;
		const confirmed = table.confirmed[row] === 1;
		const unseenFor = time - table.seenAt[row]!;
		if (unseenFor > (confirmed ? rule.missTimeout : rule.confirmWithin)) {
			table.remove(row);
			continue;
		}
		if (!mayMiss(table.sightings(row), robot, scans) || !sees(survey.inViewX[k]!, survey.inViewY[k]!)) continue;
		const misses = table.misses[row]! + 1;
		table.misses[row] = misses;
		table.markChanged(row);
		if (confirmed ? misses >= rule.missesToDelete || unseenFor >= rule.missedFor : misses >= GLITCH_MISSES) {
			table.remove(row);
		}
	}
}

/**
 * Somebody may stand between this robot and the person. So it only counts as a miss when the robot has seen the person
 * before, or when every robot that has seen them has looked again in vain.
 */
function mayMiss(seenBy: readonly Sighting[], robot: string, scans: RecentScans): boolean {
	if (seenBy.some((sighting) => sighting.robot === robot && sighting.localId !== null)) return true;
	return seenBy.every(
		(sighting) => sighting.localId === null || (scans.get(sighting.robot)?.at(-1)?.time ?? Infinity) > sighting.at
	);
}

function withScan(heard: readonly RecentScan[], scan: RecentScan, rule: TrackerRule): RecentScan[] {
	const own = heard.filter(({ time }) => scan.time - time <= rule.apartFor);
	const after = own.findIndex(({ time }) => time > scan.time);
	own.splice(after < 0 ? own.length : after, 0, scan);
	return own;
}
