/** Detected halts against true ones: who belongs to whom, and what follows from it. */

import type { HaltKind } from '../../src/lib/domain/halts/halt-detector.ts';
import type { Verdict } from '../../src/lib/domain/room/room.ts';
import { assignMostPairs } from '../../src/lib/domain/tracking/assignment.ts';

/** A halt as the simulation has it. Times in s since the start. */
export interface ExpectedHalt {
	readonly robot: string;
	readonly kind: HaltKind;
	readonly cause: string;
	readonly onset: number;
	readonly end: number | null;
	/** From the true room; null where the question does not arise */
	readonly verdict: Verdict | null;
	/** Whether the desk's own definition calls it a halt; those that do not may be reported or not. */
	readonly counts: boolean;
}

/** A halt as the engine reported it. Times in s since the start. */
export interface DetectedHalt {
	readonly robot: string;
	/** First kind reported, and the last */
	readonly kind: HaltKind;
	readonly lastKind: HaltKind;
	readonly onset: number;
	readonly detectedAt: number;
	readonly end: number | null;
	readonly verdict: Verdict;
	/** What became of it while it was open */
	readonly changes: readonly { readonly kind: HaltKind; readonly at: number }[];
}

interface Pair {
	readonly truth: ExpectedHalt;
	readonly found: DetectedHalt;
}

export interface HaltMatches {
	readonly pairs: readonly Pair[];
	/** True halts that count and were not reported */
	readonly missed: readonly ExpectedHalt[];
	/** Reports without any true halt */
	readonly falseAlarms: readonly DetectedHalt[];
}

/** s by which the two onsets may differ. */
const ONSET_WITHIN_S = 5;

/**
 * One-to-one per robot, as many pairs as possible and then the least sum of onset differences. Halts that count are
 * paired first, so that a short stop beside one never takes its report away. A halt that turned into another kind while
 * its report was still open, as when a robot's drive fails where people held it up, is reported by that change.
 */
export function matchHalts(truths: readonly ExpectedHalt[], found: readonly DetectedHalt[]): HaltMatches {
	const pairs: Pair[] = [];
	const paired = new Set<ExpectedHalt | DetectedHalt>();
	for (const counts of [true, false]) {
		for (const robot of new Set(found.map((halt) => halt.robot))) {
			const rows = truths.filter((truth) => truth.robot === robot && truth.counts === counts);
			const columns = found.filter((halt) => halt.robot === robot && !paired.has(halt));
			const costs = rows.map(({ onset }) => columns.map((halt) => Math.abs(halt.onset - onset)));
			for (const [row, column] of assignMostPairs(costs, ONSET_WITHIN_S).pairs) {
				const pair = { truth: rows[row]!, found: columns[column]! };
				pairs.push(pair);
				paired.add(pair.truth).add(pair.found);
			}
		}
	}
	for (const truth of truths) {
		if (!truth.counts || paired.has(truth)) continue;
		for (const halt of found) {
			const change = halt.robot === truth.robot ? halt.changes.find((one) => tells(one, truth)) : undefined;
			if (!change) continue;
			pairs.push({ truth, found: { ...halt, kind: change.kind, onset: change.at, detectedAt: change.at } });
			paired.add(truth);
			break;
		}
	}
	return {
		pairs,
		missed: truths.filter((truth) => truth.counts && !paired.has(truth)),
		falseAlarms: found.filter((halt) => !paired.has(halt))
	};
}

const tells = ({ kind, at }: DetectedHalt['changes'][number], truth: ExpectedHalt): boolean =>
	kind === truth.kind && Math.abs(at - truth.onset) <= ONSET_WITHIN_S;

/** How often each pair of words came together, as `true>found`. */
export function countPairs<T>(pairs: readonly T[], words: (pair: T) => readonly [string, string]): Map<string, number> {
	const counts = new Map<string, number>();
	for (const pair of pairs) {
		const name = words(pair).join('>');
		counts.set(name, (counts.get(name) ?? 0) + 1);
	}
	return counts;
}
