import { describe, expect, it } from 'vitest';
import fc from 'fast-check';
import {
	computeFlexibility,
	computeNoiseFloor,
	currentFlexibility,
	DEFAULT_FLEXIBILITY_RULE,
	startFlexibility,
	stepFlexibility,
	type FlexibilityState,
	type TrackSample
} from './flexibility.ts';

const RULE = DEFAULT_FLEXIBILITY_RULE;
const batch = { horizonS: 4, nearM: 4, quantile: 0.85 };

/** A track every 0.5 s that says velocity (v, 0) and misses by the given m/s sideways in each window of 2 s. */
function trackOf(v: number, misses: number[], x0 = 0): TrackSample[] {
	const samples: TrackSample[] = [];
	let y = 0;
	for (let i = 0; i <= misses.length * 4; i++) {
		samples.push({ time: i / 2, x: x0 + (v * i) / 2, y, vx: v, vy: 0 });
		y += (misses[Math.floor(i / 4)] ?? 0) / 2;
	}
	return samples;
}

const robotAt = (x: number) => ({ samples: Array.from({ length: 40 }, (_, i) => ({ time: i / 2, x, y: 0 })) });

describe('recorded tracks', () => {
	it('takes the 85th percentile (type 7) of the misses per second', () => {
		const tracks = [
			{ id: 'a', samples: trackOf(0.2, [0.2, 0.1, 0]) },
			{ id: 'b', samples: trackOf(0.3, [0.4, 0.4]) },
			{ id: 'c', samples: trackOf(0, [0.3, 0]) }
		];
		const found = computeFlexibility(tracks, [robotAt(0)], batch);
		expect(found.tracks).toBe(3);
		expect(found.residuals).toHaveLength(7);
		expect(found.flexibility).toBeCloseTo(0.4, 9);
	});

	it('counts only windows that start near a robot, in robots sampled then', () => {
		const passing = [{ id: 'a', samples: trackOf(1.5, [0.1, 0.5, 0.9]) }];
		const found = computeFlexibility(passing, [robotAt(0)], batch);
		expect(found.residuals).toHaveLength(2);
		expect(computeFlexibility(passing, [robotAt(50)], batch).flexibility).toBeNull();
	});

	it('is not defined without a window, never 0', () => {
		expect(computeFlexibility([], [robotAt(0)], batch)).toEqual({ residuals: [], tracks: 0, flexibility: null });
		const short = [{ id: 'a', samples: trackOf(1, [0.2]).slice(0, 3) }];
		expect(computeFlexibility(short, [robotAt(0)], batch).flexibility).toBeNull();
		expect(computeFlexibility([{ id: 'a', samples: [] }], [robotAt(0)], batch).flexibility).toBeNull();
	});

	it('trap: windows lie end to end, as overlapping windows of one track are not n samples', () => {
		const found = computeFlexibility([{ id: 'a', samples: trackOf(0, [0.2, 0.2, 0.2]) }], [robotAt(0)], batch);
		expect(found.residuals).toHaveLength(3);
	});

	it('trap: uses the velocity known at the start of the window', () => {
		const samples = trackOf(0.5, [0, 0]).map((sample, i) => (i > 0 && i < 4 ? { ...sample, vx: 9 } : sample));
		expect(computeFlexibility([{ id: 'a', samples }], [robotAt(0)], batch).flexibility).toBeCloseTo(0, 9);
	});
});

describe('noise floor', () => {
	it('trap: tracker noise looks like flexibility: 0.21 m/s for 5 cm, 0.1 m/s and windows of 2 s', () => {
		expect(computeNoiseFloor(RULE)).toBeCloseTo(0.21, 2);
		expect(computeNoiseFloor({ ...RULE, positionSd: 0, velocitySd: 1 })).toBeCloseTo(1.948, 3);
	});
});

describe('learning', () => {
	/** Feeds people who each walk for 2.1 s past a robot at the origin and miss by `misses[i]`. */
	function learn(misses: number[], { x0 = 0, from = startFlexibility() as FlexibilityState, dt = 0.5 } = {}) {
		let state = from;
		let clock = Number.isFinite(state.time) ? state.time + 10 : 0;
		misses.forEach((miss, id) => {
			for (let t = 0; t <= 2.1; t += dt) {
				const track = { id, x: x0 + t, y: miss * t, vx: 1, vy: 0 };
				state = stepFlexibility(state, { time: clock + t, tracks: [track], robots: [{ x: 0, y: 0 }] }, RULE);
			}
			clock += 10;
		});
		return state;
	}

	it('uses the default of 0.3 m/s and says so until 50 windows are known', () => {
		const few = learn(Array.from({ length: 49 }, () => 0.5));
		expect(currentFlexibility([few], RULE)).toMatchObject({ value: 0.3, n: 49, learned: false });
		const enough = learn([0.5], { from: few });
		expect(currentFlexibility([enough], RULE)).toMatchObject({ n: 50, learned: true });
		expect(currentFlexibility([enough], RULE).value).toBeCloseTo(0.5, 9);
	});

	it('stays within the bounds, whatever was seen, and shows the noise floor beside it', () => {
		const values = (miss: number) => currentFlexibility([learn(Array.from({ length: 60 }, () => miss))], RULE);
		expect(values(0).value).toBe(0.1);
		expect(values(3).value).toBe(0.8);
		expect(values(3).noiseFloor).toBeCloseTo(0.21, 2);
	});

	it('leaves out people far from every robot, gaps in a track, and tracks that end early', () => {
		expect(learn([0.5, 0.5], { x0: 5 }).residuals).toEqual([]);
		const look = (state: FlexibilityState, time: number) =>
			stepFlexibility(
				state,
				{ time, tracks: [{ id: 1, x: time, y: 0, vx: 1, vy: 0 }], robots: [{ x: 0, y: 0 }] },
				RULE
			);
		expect(look(look(startFlexibility(), 0), 3).residuals).toEqual([]);
		expect(look(look(startFlexibility(), 0), 1.5).residuals).toEqual([]);
		expect(look(look(startFlexibility(), 0), 2.2).residuals).toHaveLength(1);
	});

	it('agrees with the recorded form on the same tracks', () => {
		const misses = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 1, maxLength: 6 });
		fc.assert(
			fc.property(misses, (list) => {
				const samples = trackOf(0.1, list);
				let state = startFlexibility();
				for (const { time, ...rest } of samples) {
					state = stepFlexibility(state, { time, tracks: [{ id: 'a', ...rest }], robots: [{ x: 0, y: 0 }] }, RULE);
				}
				const recorded = computeFlexibility([{ id: 'a', samples }], [robotAt(0)], batch).residuals;
				expect(state.residuals).toHaveLength(recorded.length);
				recorded.forEach((residual, i) => expect(state.residuals[i]).toBeCloseTo(residual, 9));
			})
		);
	});

	it('keeps the latest windows only and forgets tracks that are gone', () => {
		const state = learn(
			Array.from({ length: 40 }, (_, i) => i / 100),
			{ dt: 0.5 }
		);
		const rule = { ...RULE, mostWindows: 10 };
		const track = (x: number) => [{ id: 99, x, y: 0, vx: 0, vy: 0 }];
		const later = stepFlexibility(state, { time: state.time + 10, tracks: track(0), robots: [{ x: 0, y: 0 }] }, rule);
		const last = stepFlexibility(later, { time: later.time + 2, tracks: track(0), robots: [] }, rule);
		expect(last.residuals).toHaveLength(10);
		expect(last.open.size).toBe(1);
		expect(stepFlexibility(last, { time: 0, tracks: [], robots: [] }, rule)).toBe(last);
	});
});
