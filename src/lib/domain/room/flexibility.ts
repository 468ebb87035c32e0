/**
 * How much do people of this venue change their way near a robot? Flexibility in m/s, computed from recorded tracks or
 * learned as people walk by. Our definition: the 85th percentile of the miss of the constant-velocity prediction per second,
 * over end-to-end windows of half the horizon that start near a robot.
 */

import { computeQuantile } from '../statistics/quantile.ts';

export interface FlexibilityRule {
	/** s, horizon of the room query; windows last half of it. 1…20 */
	readonly horizonS: number;
	/** m, centre distance to a robot within which a window counts. 1…20 */
	readonly nearM: number;
	/** Share of windows that miss by no more than the flexibility. 0.5…0.99 */
	readonly quantile: number;
	/** m/s used until `leastWindows` are learned. 0…1 */
	readonly fallback: number;
	/** Windows before a learned value is trusted. 10…1000; chosen by us: an 85th percentile of 50 rests on 7 or 8 above it. */
	readonly leastWindows: number;
	/** Latest windows kept. 50…10 000 */
	readonly mostWindows: number;
	/** m/s, bounds of the value used. Chosen by us: below, nobody would ever yield; above, people would have to jump. */
	readonly least: number;
	readonly most: number;
	/** m, standard deviation of a tracked position per axis, for the noise floor */
	readonly positionSd: number;
	/** m/s, standard deviation of a tracked velocity per axis, for the noise floor */
	readonly velocitySd: number;
}

/** Horizon, distance, quantile and fallback as in the definition of room to move; the rest chosen by us. */
export const DEFAULT_FLEXIBILITY_RULE: FlexibilityRule = {
	horizonS: 4,
	nearM: 4,
	quantile: 0.85,
	fallback: 0.3,
	leastWindows: 50,
	mostWindows: 2000,
	least: 0.1,
	most: 0.8,
	positionSd: 0.05,
	velocitySd: 0.1
};

/** Position in m, velocity in m/s as known at `time` (not smoothed with later samples), floor frame. */
export interface TrackSample {
	readonly time: number;
	readonly x: number;
	readonly y: number;
	readonly vx: number;
	readonly vy: number;
}

/**
 * Flexibility of recorded tracks. Windows run end to end from each track's first sample; a window counts when samples
 * exist at both its ends (to 1 µs) and a robot sampled at its start is within `nearM`. Overlapping windows would not be
 * independent samples.
 *
 * @returns residuals in m/s in order of tracks, then time; number of tracks with a window; and the flexibility in m/s,
 * null without any window (never 0)
 */
export function computeFlexibility(
	tracks: readonly { readonly id: string; readonly samples: readonly TrackSample[] }[],
	robots: readonly { readonly samples: readonly { readonly time: number; readonly x: number; readonly y: number }[] }[],
	{ horizonS, nearM, quantile }: Pick<FlexibilityRule, 'horizonS' | 'nearM' | 'quantile'>
): { residuals: number[]; tracks: number; flexibility: number | null } {
	const window = horizonS / 2;
	const places = robots.map(({ samples }) => new Map(samples.map((sample) => [micro(sample.time), sample])));
	const residuals: number[] = [];
	const counted = new Set<string>();
	for (const { id, samples } of tracks) {
		const at = new Map(samples.map((sample) => [micro(sample.time), sample]));
		const end = samples[samples.length - 1]?.time ?? -Infinity;
		for (let time = samples[0]?.time ?? 0; time <= end + 1e-9; time += window) {
			const from = at.get(micro(time));
			const to = at.get(micro(time + window));
			const near = places.some((place) => isNear(from, place.get(micro(time)), nearM));
			if (!from || !to || !near) continue;
			residuals.push(residual(from, to, window));
			counted.add(id);
		}
	}
	return { residuals, tracks: counted.size, flexibility: computeQuantile(residuals, quantile) };
}

/** Learning state of one venue or floor; start anew to forget. */
export interface FlexibilityState {
	readonly time: number;
	/** Latest residuals, oldest first, m/s */
	readonly residuals: readonly number[];
	/** Open window of each live track: its first sample, and whether a robot was near then */
	readonly open: ReadonlyMap<string | number, TrackSample & { readonly near: boolean }>;
}

/** @param residuals what was learned before, oldest first, m/s; anything that is no such number is left out */
export const startFlexibility = (residuals: readonly number[] = []): FlexibilityState => ({
	time: -Infinity,
	residuals: residuals.filter((residual) => Number.isFinite(residual) && residual >= 0),
	open: new Map()
});

/** A window that cannot be closed within this factor of its length is dropped: the track had a gap. */
const LATE = 1.25;

/**
 * Learning state after one more look at the floor. Time must not fall; an older observation changes nothing.
 * A track that is not seen any more loses its open window. Ids may be reused only after a window's length.
 */
export function stepFlexibility(
	state: FlexibilityState,
	observation: {
		readonly time: number;
		readonly tracks: readonly {
			readonly id: string | number;
			readonly x: number;
			readonly y: number;
			readonly vx: number;
			readonly vy: number;
		}[];
		readonly robots: readonly { readonly x: number; readonly y: number }[];
	},
	rule: FlexibilityRule
): FlexibilityState {
	const { time, tracks, robots } = observation;
	if (!(time >= state.time)) return state;
	const window = rule.horizonS / 2;
	const fresh: number[] = [];
	const open = new Map(state.open);
	for (const track of tracks) {
		const from = open.get(track.id);
		const elapsed = from ? time - from.time : Infinity;
		if (from && elapsed < window - 1e-6) continue;
		if (from?.near && elapsed <= window * LATE) fresh.push(residual(from, track, elapsed));
		const near = robots.some((robot) => isNear(track, robot, rule.nearM));
		open.set(track.id, { time, x: track.x, y: track.y, vx: track.vx, vy: track.vy, near });
	}
	for (const [id, from] of open) if (time - from.time > window * LATE) open.delete(id);
	const residuals = fresh.length > 0 ? [...state.residuals, ...fresh].slice(-rule.mostWindows) : state.residuals;
	return { time, residuals, open };
}

/** What people of a venue give way by, and how well that is known. */
export interface Flexibility {
	/** m/s */
	readonly value: number;
	/** Windows behind it */
	readonly n: number;
	/** False while the fallback is used */
	readonly learned: boolean;
	/** m/s that tracker noise alone would give */
	readonly noiseFloor: number;
}

/**
 * The flexibility to use now from all that was learned on the floors of one venue, m/s: bounded, or the fallback while too
 * few windows are known (`learned` says which). `n` windows stand behind it. Show `noiseFloor` beside it: what tracker noise alone would give with nobody yielding.
 */
export function currentFlexibility(states: readonly FlexibilityState[], rule: FlexibilityRule): Flexibility {
	const residuals = states.flatMap((state) => state.residuals);
	const n = residuals.length;
	const found = n >= rule.leastWindows ? computeQuantile(residuals, rule.quantile) : null;
	const value = found === null ? rule.fallback : Math.min(rule.most, Math.max(rule.least, found));
	return { value, n, learned: found !== null, noiseFloor: computeNoiseFloor(rule) };
}

/**
 * Flexibility that white tracker noise alone produces, m/s: the quantile of a Rayleigh distribution with variance
 * 2σ_x²/h² + σ_v² per axis; 1.948 times its root at 0.85.
 */
export function computeNoiseFloor({ horizonS, quantile, positionSd, velocitySd }: FlexibilityRule): number {
	const window = horizonS / 2;
	return Math.sqrt(-2 * Math.log(1 - quantile)) * Math.sqrt((2 * positionSd ** 2) / window ** 2 + velocitySd ** 2);
}

function residual(from: TrackSample, to: { readonly x: number; readonly y: number }, seconds: number): number {
	return Math.hypot((to.x - from.x) / seconds - from.vx, (to.y - from.y) / seconds - from.vy);
}

function isNear(
	a: { readonly x: number; readonly y: number } | undefined,
	b: { readonly x: number; readonly y: number } | undefined,
	distance: number
): boolean {
	return a !== undefined && b !== undefined && Math.hypot(a.x - b.x, a.y - b.y) <= distance + 1e-12;
}

const micro = (time: number): number => Math.round(time * 1e6);
