import { expect, it } from 'vitest';
import { computeTrackingQuality, type TrackingFrame } from './mot.ts';

type Places = Record<string, [number, number]>;
const frame = (truth: Places, tracks: Places): TrackingFrame => {
	const read = (places: Places) => new Map(Object.entries(places).map(([id, [x, y]]) => [id, { x, y }] as const));
	return { truth: read(truth), tracks: read(tracks) };
};
const GATE = 0.5;

it('is perfect when every truth has its track', () => {
	const frames = [0, 1, 2].map((t) => frame({ a: [t, 0], b: [t, 3] }, { one: [t, 0], two: [t, 3] }));
	expect(computeTrackingQuality(frames, GATE)).toMatchObject({ mota: 1, motp: 0, idf1: 1, switches: 0 });
});

it('trap: MOTA can be negative (Bernardin & Stiefelhagen 2008, from memory)', () => {
	const wrong = frame({ a: [0, 0] }, { one: [5, 5], two: [6, 6] });
	expect(computeTrackingQuality([wrong, wrong], GATE)).toMatchObject({ mota: -2, motp: null, idf1: 0 });
});

it('trap: keeps the pairs of the frame before while they are inside the gate', () => {
	const frames = [
		frame({ a: [0, 0], b: [1, 0] }, { one: [0, 0], two: [1, 0] }),
		frame({ a: [0.4, 0], b: [0.6, 0] }, { one: [0.6, 0], two: [0.4, 0] })
	];
	expect(computeTrackingQuality(frames, GATE).switches).toBe(0);
});

it('trap: counts a switch across a gap', () => {
	const frames = [
		frame({ a: [0, 0] }, { one: [0, 0] }),
		frame({ a: [1, 0] }, {}),
		frame({ a: [2, 0] }, { new: [2, 0] })
	];
	expect(computeTrackingQuality(frames, GATE)).toMatchObject({ misses: 1, switches: 1 });
});

it('trap: MOTA hardly sees an identity swap, IDF1 does (Ristani et al. 2016, from memory)', () => {
	const frames = [0, 1, 2, 3, 4].map((t) => frame({ a: [t, 0] }, { [t < 2 ? 'one' : 'two']: [t, 0] }));
	const { mota, idf1 } = computeTrackingQuality(frames, GATE);
	expect(mota).toBeCloseTo(0.8, 12);
	expect(idf1).toBeCloseTo(0.6, 12);
});

it('has no value, rather than 0, where there was nothing to measure', () => {
	expect(computeTrackingQuality([], GATE)).toMatchObject({ mota: null, motp: null, idf1: null, identityRecall: null });
	expect(computeTrackingQuality([frame({}, { one: [0, 0] })], GATE)).toMatchObject({ mota: null, falseTracks: 1 });
});
