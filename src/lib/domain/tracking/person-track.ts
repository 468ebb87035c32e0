/** One person as all robots together know them, and where they are expected to be. */

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

/** When a robot last reported a track, and under which name. */
export interface Sighting {
	readonly robot: string;
	/**
	 * Null once the robot has given the name to somebody else, or has not reported the person for `forgetAfter`: it no
	 * longer counts as following them, but has seen them apart from whoever it saw beside them.
	 */
	readonly localId: string | null;
	/** s */
	readonly at: number;
}

/** Measurements are round and so is the noise, so x and y share one covariance and nothing ever prefers a direction. */
export interface PersonTrack {
	readonly id: number;
	/** m */
	readonly x: number;
	readonly y: number;
	/** m/s */
	readonly vx: number;
	readonly vy: number;
	/** Covariance of position and speed along each axis: m², m²/s and m²/s² */
	readonly variance: number;
	readonly cross: number;
	readonly speedVariance: number;
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
	/** One per robot that has reported the person lately: within `forgetAfter`, or `apartFor` before the latest scan */
	readonly seenBy: readonly Sighting[];
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
	statedVelocitySd: 0.2,
	maxSpeed: 2.5,
	hintBonus: 4,
	confirmHits: 2,
	confirmWithin: 1.2,
	missTimeout: 2,
	missesToDelete: 8,
	missedFor: 1.5,
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

/** s of motion `dt` seconds after the state; before it (dt < 0) motion is straight. */
export function reachAfter(dt: number): number {
	if (dt <= WALKS_ON) return dt;
	const fade = Math.min((dt - WALKS_ON) / FADES_IN, 1);
	return WALKS_ON + FADES_IN * (fade - (fade * fade) / 2);
}

/** Share of the velocity left `dt` seconds after the state, 0…1. */
export const speedLeftAfter = (dt: number): number =>
	dt <= WALKS_ON ? 1 : 1 - Math.min((dt - WALKS_ON) / FADES_IN, 1);

/** s of process noise; somebody who has stopped being seen is not unsure without limit. */
export const noiseTimeAfter = (dt: number): number => Math.min(Math.abs(dt), WALKS_ON + FADES_IN / 2);

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
	const reach = reachAfter(dt);
	const left = speedLeftAfter(dt);
	return {
		x: track.x + reach * track.vx,
		y: track.y + reach * track.vy,
		vx: left * track.vx,
		vy: left * track.vy,
		variance: varianceAfter(track.variance, track.cross, track.speedVariance, dt, rule.q)
	};
}

/** m² per axis by which one robot's map and clock may put a person walking at (vx, vy) m/s in another place. */
export const mapVariance = (vx: number, vy: number, { alignmentSd, clockSd }: TrackerRule): number =>
	alignmentSd * alignmentSd + (vx * vx + vy * vy) * clockSd * clockSd;

/** m² per axis, variance of the position `dt` seconds before or after a state with the given covariance. */
export function varianceAfter(variance: number, cross: number, speedVariance: number, dt: number, q: number): number {
	const reach = reachAfter(dt);
	const noise = noiseTimeAfter(dt);
	// Going back in time must not make a state surer, so the covariance of position and speed counts forwards only.
	return variance + 2 * Math.max(reach, 0) * cross + reach * reach * speedVariance + (q * noise * noise * noise) / 3;
}
