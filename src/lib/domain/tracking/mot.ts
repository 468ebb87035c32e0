/** How well tracks follow the truth over time: CLEAR MOT and identity measures. */

import type { Point } from '../geometry/types.ts';
import { assignMostPairs } from './assignment.ts';

/** Who is where in one frame, by identity. */
export interface TrackingFrame {
	readonly truth: ReadonlyMap<string, Point>;
	readonly tracks: ReadonlyMap<string, Point>;
}

interface FrameMatches {
	/** [truth, track], in order of the truth's identity */
	readonly matches: readonly (readonly [truth: string, track: string])[];
	readonly misses: number;
	readonly falseTracks: number;
	readonly switches: number;
}

export interface TrackingQuality {
	readonly frames: readonly FrameMatches[];
	readonly misses: number;
	readonly falseTracks: number;
	readonly switches: number;
	/** Truths over all frames */
	readonly truths: number;
	/** 1 − (misses + false + switches) / truths; can be negative; null without truths */
	readonly mota: number | null;
	/** m, mean distance of the matches; null without matches */
	readonly motp: number | null;
	readonly identityTrue: number;
	readonly identityFalse: number;
	readonly identityMissed: number;
	/** 2 IDTP / (2 IDTP + IDFP + IDFN); null when there was nothing at all */
	readonly idf1: number | null;
	/** Null without tracks, and without truths, respectively */
	readonly identityPrecision: number | null;
	readonly identityRecall: number | null;
}

/**
 * Quality of tracks against the truth; a pair counts within `gate` metres.
 *
 * Pairs of the frame before are kept while they are inside the gate, then as many pairs as possible at least distance
 * are added (CLEAR MOT: Bernardin & Stiefelhagen 2008, from memory). A switch is a truth matched to another track than
 * the last time it was matched, however long ago. Identities: best one-to-one map of truths to tracks over the whole
 * run (Ristani et al. 2016, from memory).
 */
export function computeTrackingQuality(frames: readonly TrackingFrame[], gate: number): TrackingQuality {
	const lastTrack = new Map<string, string>();
	let kept = new Map<string, string>();
	const matched: FrameMatches[] = [];
	let distances = 0;
	let matches = 0;
	for (const frame of frames) {
		kept = matchFrame(frame, kept, gate);
		let switches = 0;
		for (const [truth, track] of kept) {
			const before = lastTrack.get(truth);
			if (before !== undefined && before !== track) switches += 1;
			lastTrack.set(truth, track);
			distances += distanceBetween(frame, truth, track);
		}
		matches += kept.size;
		matched.push({
			matches: [...kept].sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0)),
			misses: frame.truth.size - kept.size,
			falseTracks: frame.tracks.size - kept.size,
			switches
		});
	}
	const total = (of: (frame: FrameMatches) => number) => matched.reduce((sum, frame) => sum + of(frame), 0);
	const misses = total((frame) => frame.misses);
	const falseTracks = total((frame) => frame.falseTracks);
	const switches = total((frame) => frame.switches);
	const truths = matches + misses;
	const reports = matches + falseTracks;
	const identityTrue = countIdentityMatches(frames, gate);
	return {
		frames: matched,
		misses,
		falseTracks,
		switches,
		truths,
		mota: truths === 0 ? null : 1 - (misses + falseTracks + switches) / truths,
		motp: matches === 0 ? null : distances / matches,
		identityTrue,
		identityFalse: reports - identityTrue,
		identityMissed: truths - identityTrue,
		idf1: truths + reports === 0 ? null : (2 * identityTrue) / (truths + reports),
		identityPrecision: reports === 0 ? null : identityTrue / reports,
		identityRecall: truths === 0 ? null : identityTrue / truths
	};
}

function matchFrame(frame: TrackingFrame, before: ReadonlyMap<string, string>, gate: number): Map<string, string> {
	const pairs = new Map<string, string>();
	for (const [truth, track] of before) {
		if (distanceBetween(frame, truth, track) <= gate) pairs.set(truth, track);
	}
	const taken = new Set(pairs.values());
	const truths = [...frame.truth.keys()].filter((truth) => !pairs.has(truth));
	const tracks = [...frame.tracks.keys()].filter((track) => !taken.has(track));
	const costs = truths.map((truth) => tracks.map((track) => distanceBetween(frame, truth, track)));
	for (const [row, column] of assignMostPairs(costs, gate).pairs) pairs.set(truths[row]!, tracks[column]!);
	return pairs;
}

/** m; `Infinity` when either is not in the frame. */
function distanceBetween({ truth, tracks }: TrackingFrame, truthId: string, trackId: string): number {
	const a = truth.get(truthId);
	const b = tracks.get(trackId);
	return a && b ? Math.hypot(a.x - b.x, a.y - b.y) : Infinity;
}

function countIdentityMatches(frames: readonly TrackingFrame[], gate: number): number {
	const together = new Map<string, Map<string, number>>();
	const trackIds = new Set<string>();
	for (const frame of frames) {
		for (const track of frame.tracks.keys()) trackIds.add(track);
		for (const truth of frame.truth.keys()) {
			const counts = together.get(truth) ?? new Map<string, number>();
			together.set(truth, counts);
			for (const track of frame.tracks.keys()) {
				if (distanceBetween(frame, truth, track) <= gate) counts.set(track, (counts.get(track) ?? 0) + 1);
			}
		}
	}
	const columns = [...trackIds];
	const costs = [...together.values()].map((counts) => columns.map((track) => -(counts.get(track) ?? 0)));
	return assignMostPairs(costs).pairs.reduce((sum, [row, column]) => sum - costs[row]![column]!, 0);
}
