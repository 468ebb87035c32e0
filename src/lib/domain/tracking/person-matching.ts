/** Which person of one robot's scan is which known track. */

import { mostPairsPrice, solveSparse, type SparseCosts } from './assignment.ts';
import { chiSquareGate } from './gating.ts';
import {
	coasting,
	mapVariance,
	positionVariance,
	type PersonMeasurement,
	type PersonTrack,
	type Sighting,
	type TrackerRule
} from './person-track.ts';

export interface Matching {
	/** By measurement: index of its track, or −1 */
	readonly trackOf: Int32Array;
	/** By measurement: index of the track this robot last used the same name for, or −1 */
	readonly namedBefore: Int32Array;
	/** By measurement: 1 when its name was in use but its track went to another person of the scan, or is far away */
	readonly moved: Uint8Array;
}

/** χ² with 2 degrees of freedom: five deviations. Beyond this a measurement is no unlucky reading of the same person. */
const FAR = 25;
/** s since this robot saw the track, for which it may still follow the person through a sudden turn */
const FOLLOW_FOR = 1;
/** s for which that holds under another name: later it is as likely somebody else who has come into view */
const UNNAMED_FOR = 0.2;

/** What matching has to know of one track at the time of the scan. */
interface Expected {
	readonly index: number;
	readonly track: PersonTrack;
	readonly x: number;
	readonly y: number;
	/** m², per axis, with what the maps of two robots may differ by; without the measurement's own variance */
	readonly variance: number;
	readonly alignment: number;
	/** s from the state to the scan */
	readonly elapsed: number;
	/** Last report of the track by this robot, if it still counts */
	readonly sighting: Sighting | undefined;
}

/**
 * One-to-one matching of a robot's persons with the tracks, in two passes.
 *
 * First by Mahalanobis distance inside the gate, the robot's own names tipping the balance between near equals; a vague
 * track loses to a sharp one through ln |S|. Then a person this robot was just following and who turned on the spot may
 * leave the gate, as far as somebody can walk in the time.
 */
export function matchPersons(
	tracks: readonly PersonTrack[],
	persons: readonly PersonMeasurement[],
	robot: string,
	time: number,
	rule: TrackerRule
): Matching {
	const gate = chiSquareGate(rule.gateProbability, 2);
	const expected = expectNear(tracks, persons, robot, time, rule);
	const names = new Map<string, number>();
	expected.forEach(({ sighting }, e) => sighting && names.set(sighting.localId, e));

	const trackOf = matchInsideGate(expected, persons, gate, rule);
	matchTurns(expected, persons, trackOf, gate, rule);

	const namedBefore = new Int32Array(persons.length).fill(-1);
	const moved = new Uint8Array(persons.length);
	const taken = new Set(trackOf);
	persons.forEach((person, j) => {
		const e = names.get(person.localId);
		if (e === undefined) return;
		const before = expected[e]!;
		namedBefore[j] = before.index;
		const far = distanceSquared(before, person) > FAR * (before.variance + person.sd * person.sd);
		moved[j] = Number(trackOf[j] !== e && (far || taken.has(e)));
	});
	return { trackOf: trackOf.map((e) => expected[e]?.index ?? -1), namedBefore, moved };
}

/** m², what the maps of this robot and of those that made the track may differ by: once per robot on either side. */
function alignmentVariance(track: PersonTrack, robot: string, time: number, rule: TrackerRule): number {
	let own = false;
	let others = false;
	for (const [name, { at }] of track.seenBy) {
		if (time - at > rule.forgetAfter) continue;
		if (name === robot) own = true;
		else others = true;
	}
	return (own ? (others ? 1 : 0) : 2) * mapVariance(track, rule);
}

/** The tracks any of the persons could belong to. */
function expectNear(
	tracks: readonly PersonTrack[],
	persons: readonly PersonMeasurement[],
	robot: string,
	time: number,
	rule: TrackerRule
): Expected[] {
	let [minX, minY, maxX, maxY, noise] = [Infinity, Infinity, -Infinity, -Infinity, 0];
	for (const { x, y, sd } of persons) {
		if (x < minX) minX = x;
		if (x > maxX) maxX = x;
		if (y < minY) minY = y;
		if (y > maxY) maxY = y;
		noise = Math.max(noise, sd * sd);
	}
	const expected: Expected[] = [];
	tracks.forEach((track, index) => {
		const elapsed = time - track.updatedAt;
		if (Math.abs(elapsed) > rule.missTimeout) return;
		const { reach } = coasting(elapsed);
		const x = track.x + reach * track.vx;
		const y = track.y + reach * track.vy;
		const position = positionVariance(track.covariance, elapsed, rule.q);
		const radius =
			Math.sqrt(FAR * (position + 2 * mapVariance(track, rule) + noise)) +
			rule.maxSpeed * Math.min(Math.abs(elapsed), FOLLOW_FOR);
		if (x < minX - radius || x > maxX + radius || y < minY - radius || y > maxY + radius) return;
		const sighting = track.seenBy.get(robot);
		const alignment = alignmentVariance(track, robot, time, rule);
		expected.push({
			index,
			track,
			x,
			y,
			variance: position + alignment,
			alignment,
			elapsed,
			sighting: sighting && time - sighting.at <= rule.forgetAfter ? sighting : undefined
		});
	});
	return expected;
}

function matchInsideGate(
	expected: readonly Expected[],
	persons: readonly PersonMeasurement[],
	gate: number,
	rule: TrackerRule
): Int32Array {
	// Persons by x, so that a track only meets those within its own reach.
	const order = persons.map((_, j) => j).sort((a, b) => persons[a]!.x - persons[b]!.x);
	const xs = Float64Array.from(order, (j) => persons[j]!.x);
	const noise = persons.reduce((most, { sd }) => Math.max(most, sd * sd), 0);
	const least = new Float64Array(persons.length).fill(Infinity);
	const edges: Edge[] = [];
	expected.forEach((candidate, e) => {
		const radius = Math.sqrt(gate * (candidate.variance + noise));
		for (let k = lowerBound(xs, candidate.x - radius); k < xs.length && xs[k]! <= candidate.x + radius; k += 1) {
			const j = order[k]!;
			const person = persons[j]!;
			const variance = candidate.variance + person.sd * person.sd;
			const d2 = distanceSquared(candidate, person) / variance;
			if (d2 > gate) continue;
			const spread = 2 * Math.log(variance); // ln |S| of a round S
			least[j] = Math.min(least[j]!, spread);
			const named = candidate.sighting?.localId === person.localId;
			edges.push({ row: j, column: e, cost: d2 + spread - (named ? rule.hintBonus : 0) });
		}
	});
	let widest = 0;
	for (const edge of edges) {
		edge.cost -= least[edge.row]!;
		widest = Math.max(widest, edge.cost);
	}
	// Leaving both out costs at least as much as any pair that is allowed.
	return solveSparse(sparseFrom(edges, persons.length, expected.length), Math.max(gate, widest));
}

/** Second pass: fills `trackOf` for persons left over by the first. */
function matchTurns(
	expected: readonly Expected[],
	persons: readonly PersonMeasurement[],
	trackOf: Int32Array,
	gate: number,
	rule: TrackerRule
): void {
	const taken = new Set(trackOf);
	const followed = expected
		.map((candidate, e) => ({ candidate, e }))
		.filter(
			({ candidate: { sighting, elapsed }, e }) => sighting && elapsed >= 0 && elapsed <= FOLLOW_FOR && !taken.has(e)
		);
	const open = [...trackOf.keys()].filter((j) => trackOf[j]! < 0);
	if (followed.length === 0 || open.length === 0) return;
	const edges: Edge[] = [];
	for (const { candidate, e } of followed) {
		const { track, alignment, elapsed, sighting, variance } = candidate;
		open.forEach((j, row) => {
			const person = persons[j]!;
			const own = person.sd * person.sd;
			const distance = Math.hypot(person.x - track.x, person.y - track.y);
			const spread = Math.sqrt(gate * (track.covariance[0]! + alignment + own));
			const named = sighting!.localId === person.localId;
			const near = named && distanceSquared(candidate, person) <= FAR * (variance + own);
			const walked = rule.maxSpeed * (named ? elapsed : Math.min(elapsed, UNNAMED_FOR));
			if (!near && distance > spread + walked) return;
			edges.push({ row, column: e, cost: distance - (named ? NAME_WORTH : 0) });
		});
	}
	const sparse = sparseFrom(edges, open.length, expected.length);
	solveSparse(sparse, mostPairsPrice(sparse)).forEach((e, row) => {
		if (e >= 0) trackOf[open[row]!] = e;
	});
}

/** m; in the second pass a name outweighs any distance somebody can walk meanwhile. */
const NAME_WORTH = 10;

const distanceSquared = (a: { x: number; y: number }, b: { x: number; y: number }): number =>
	(a.x - b.x) * (a.x - b.x) + (a.y - b.y) * (a.y - b.y);

interface Edge {
	readonly row: number;
	readonly column: number;
	cost: number;
}

function sparseFrom(edges: readonly Edge[], rows: number, columns: number): SparseCosts {
	const starts = new Int32Array(rows + 1);
	for (const { row } of edges) starts[row + 1]! += 1;
	for (let row = 0; row < rows; row += 1) starts[row + 1]! += starts[row]!;
	const next = starts.slice();
	const targets = new Int32Array(edges.length);
	const costs = new Float64Array(edges.length);
	for (const { row, column, cost } of edges) {
		const at = next[row]!++;
		targets[at] = column;
		costs[at] = cost;
	}
	return { rows, columns, starts, targets, costs };
}

/** First index whose value is not below `value`. */
function lowerBound(sorted: Float64Array, value: number): number {
	let low = 0;
	let high = sorted.length;
	while (low < high) {
		const middle = (low + high) >> 1;
		if (sorted[middle]! < value) low = middle + 1;
		else high = middle;
	}
	return low;
}
