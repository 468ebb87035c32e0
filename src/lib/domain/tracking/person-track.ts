/** One person as all robots together know them, and where they are expected to be. */

import { processNoise, transport, type KalmanState } from './kalman.ts';

/** One person in one report of one robot, floor frame. */
export interface PersonMeasurement {
	/** The robot's own name for the person; may restart, switch or be used again. */
	readonly localId: string;
	/** m */
	readonly x: number;
	readonly y: number;
	/** m/s; null when the robot does not say */
	readonly vx: number | null;
	readonly vy: number | null;
	/** m, standard deviation of x and of y */
	readonly sd: number;
}

/** When and where a robot last reported a track, and under which name. */
export interface Sighting {
	readonly localId: string;
	/** s */
	readonly at: number;
	/** m, as measured */
	readonly x: number;
	readonly y: number;
}

export interface PersonTrack extends KalmanState {
	readonly id: number;
	/** s, time of the state */
	readonly updatedAt: number;
	/** Robot whose measurement made the state */
	readonly updatedBy: string;
	/** s, last measured by any robot */
	readonly seenAt: number;
	readonly bornAt: number;
	readonly hits: number;
	/** Seen often enough to be a person and not a glitch; never taken back */
	readonly confirmed: boolean;
	/** By robot; robots that have not reported the person for `forgetAfter` are left out. */
	readonly seenBy: ReadonlyMap<string, Sighting>;
	/** Scans since the last measurement that looked at the place and reported nobody */
	readonly misses: number;
	/** Another track that has been in the same place since then, if any */
	readonly closeTo: { readonly id: number; readonly since: number } | null;
}

/** Numbers the tracker decides by; the defaults are chosen by us unless a source is named. */
export interface TrackerRule {
	/** m²/s³, how freely people change speed: 1 lets a walker turn within a step */
	readonly q: number;
	/** 0…1, share of true pairs the gate keeps; 0.99 is χ² = 9.21 */
	readonly gateProbability: number;
	/** m, no measurement is taken to be better than this */
	readonly sdFloor: number;
	/** m, deviation of each robot's map from the floor plan */
	readonly alignmentSd: number;
	/** s, deviation of each robot's corrected clock; moves people by their speed */
	readonly clockSd: number;
	/** m/s, deviation of the velocity of somebody new: unknown, and as stated by a robot */
	readonly newVelocitySd: number;
	readonly statedVelocitySd: number;
	/** m/s, nobody is followed faster than this when they leave the gate by a sudden turn */
	readonly maxSpeed: number;
	/** In units of squared Mahalanobis distance: how much a robot's own name for a person weighs */
	readonly hintBonus: number;
	/** Measurements, and s they may be apart, for a track to be confirmed */
	readonly confirmHits: number;
	readonly confirmWithin: number;
	/** s a track outlives its last measurement while no robot can see the place */
	readonly missTimeout: number;
	/** Scans in a row, or s, without a report from robots that do see the place, after which the person is gone */
	readonly missesToDelete: number;
	readonly missedFor: number;
	/** s, scans older than a track by more than this claim it but do not change it */
	readonly lateLimit: number;
	/** s, scans closer in time than this are one instant: the second robot adds an opinion, not motion */
	readonly instant: number;
	/** s, two tracks one robot has seen apart this recently are two people */
	readonly apartFor: number;
	/** m, no two tracks farther apart than this are one person */
	readonly mergeWithin: number;
	/** s two established tracks must stay together before they are merged */
	readonly mergeAfter: number;
	/** s after which a robot's sighting of a track no longer counts */
	readonly forgetAfter: number;
}

export const DEFAULT_TRACKER_RULE: TrackerRule = {
	q: 1,
	gateProbability: 0.99,
	sdFloor: 0.0005,
	alignmentSd: 0.05,
	clockSd: 0.03,
	newVelocitySd: 1,
	statedVelocitySd: 0.5,
	maxSpeed: 2.5,
	hintBonus: 4,
	confirmHits: 2,
	confirmWithin: 1.2,
	missTimeout: 2,
	missesToDelete: 4,
	missedFor: 0.6,
	lateLimit: 0.5,
	instant: 0.02,
	apartFor: 2,
	mergeWithin: 0.35,
	mergeAfter: 1,
	forgetAfter: 2
};

/** s an unseen person is taken to walk on, and s in which the speed then fades: together 1 s of motion at most. */
const WALKS_ON = 0.5;
const FADES_IN = 1;

/** s of motion and share of velocity left `dt` seconds after the state; before it (dt < 0) motion is straight. */
export function coasting(dt: number): { reach: number; keep: number } {
	if (dt <= WALKS_ON) return { reach: dt, keep: 1 };
	const fade = Math.min((dt - WALKS_ON) / FADES_IN, 1);
	return { reach: WALKS_ON + FADES_IN * (fade - (fade * fade) / 2), keep: 1 - fade };
}

/** s of process noise; somebody who has stopped being seen is not unsure without limit. */
const noiseTime = (dt: number): number => Math.min(Math.abs(dt), WALKS_ON + FADES_IN / 2);

/** Full state of a track at a time not before it. */
export function coastTrack(track: PersonTrack, time: number, q: number): KalmanState {
	const dt = time - track.updatedAt;
	const { reach, keep } = coasting(dt);
	const { position, cross, velocity } = processNoise(noiseTime(dt), q);
	const covariance = transport(track.covariance, reach, keep);
	for (let axis = 0; axis < 2; axis += 1) {
		covariance[axis * 5]! += position;
		covariance[axis * 5 + 2]! += cross;
		covariance[axis * 5 + 8]! += cross;
		covariance[axis * 5 + 10]! += velocity;
	}
	return {
		x: track.x + reach * track.vx,
		y: track.y + reach * track.vy,
		vx: keep * track.vx,
		vy: keep * track.vy,
		covariance
	};
}

/**
 * Where a tracked person is at `time`, before or after the state: position m, velocity m/s, and the variance of the
 * position per axis, m². Without news they walk on for half a second and then come to rest within another.
 */
export function predictTrack(
	track: PersonTrack,
	time: number,
	rule: TrackerRule = DEFAULT_TRACKER_RULE
): { x: number; y: number; vx: number; vy: number; variance: number } {
	const dt = time - track.updatedAt;
	const { reach, keep } = coasting(dt);
	return {
		x: track.x + reach * track.vx,
		y: track.y + reach * track.vy,
		vx: keep * track.vx,
		vy: keep * track.vy,
		variance: positionVariance(track.covariance, dt, rule.q)
	};
}

/** m² per axis by which one robot's map and clock may put this person in another place than they are. */
export const mapVariance = ({ vx, vy }: PersonTrack, { alignmentSd, clockSd }: TrackerRule): number =>
	alignmentSd * alignmentSd + (vx * vx + vy * vy) * clockSd * clockSd;

/** m², the same for x and y: measurements are round, so nothing in the tracker ever prefers a direction. */
export function positionVariance(p: Float64Array, dt: number, q: number): number {
	const { reach } = coasting(dt);
	const noise = noiseTime(dt);
	// Going back in time must not make a state surer, so the covariance of position and speed counts forwards only.
	return p[0]! + 2 * Math.max(reach, 0) * p[2]! + reach * reach * p[10]! + (q * noise * noise * noise) / 3;
}
