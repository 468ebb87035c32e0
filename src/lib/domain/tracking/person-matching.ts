/** Which person of one robot's scan is which known track. */

import { mostPairsPrice, solveSparse, type SparseCosts } from './assignment.ts';
import type { PersonMeasurement, TrackerRule } from './person-track.ts';
import { FAR, FOLLOW_FOR, type Survey } from './scan-survey.ts';
import type { TrackTable } from './track-table.ts';

export interface Matching {
	/** By measurement: row of its track, or −1 */
	readonly trackOf: Int32Array;
	/** By measurement: row of the track this robot last used the same name for, or −1 */
	readonly namedBefore: Int32Array;
	/** By measurement: 1 when its name was in use but its track went to another person of the scan, or is far away */
	readonly moved: Uint8Array;
}

/** s for which a robot may follow a sudden turn under another name: later it is as likely somebody else come into view */
const UNNAMED_FOR = 0.2;

/**
 * One-to-one matching of a robot's persons with the tracks of a survey, in two passes.
 *
 * First by Mahalanobis distance inside the gate, the robot's own names tipping the balance between near equals; a vague
 * track loses to a sharp one through ln |S|. Then a person this robot was just following and who turned on the spot may
 * leave the gate, as far as somebody can walk in the time.
 *
 * @param names index of the last person of each name
 */
export function matchPersons(
	survey: Survey,
	table: TrackTable,
	persons: readonly PersonMeasurement[],
	names: ReadonlyMap<string, number>,
	gate: number,
	rule: TrackerRule
): Matching {
	const trackOf = matchInsideGate(survey, persons, gate, rule);
	const taken = new Uint8Array(survey.candidates);
	let open = 0;
	for (let j = 0; j < trackOf.length; j += 1) {
		if (trackOf[j]! < 0) open += 1;
		else taken[trackOf[j]!] = 1;
	}
	if (open > 0) matchTurns(survey, table, persons, trackOf, taken, gate, rule);

	const namedBefore = new Int32Array(persons.length).fill(-1);
	const moved = new Uint8Array(persons.length);
	for (let e = 0; e < survey.candidates; e += 1) {
		const name = survey.name[e]!;
		const j = name === null ? undefined : names.get(name);
		if (j !== undefined) namedBefore[j] = e;
	}
	for (let j = 0; j < persons.length; j += 1) {
		const person = persons[j]!;
		// Two persons of one name share what it meant before.
		const e = namedBefore[names.get(person.localId)!]!;
		if (e >= 0) {
			const far = distanceSquared(survey, e, person) > FAR * (survey.variance[e]! + person.sd * person.sd);
			moved[j] = Number(trackOf[j] !== e && (far || taken[e] === 1));
		}
	}
	for (let j = 0; j < persons.length; j += 1) {
		const last = names.get(persons[j]!.localId)!;
		if (last !== j) namedBefore[j] = namedBefore[last]!;
	}
	for (let j = 0; j < persons.length; j += 1) {
		if (namedBefore[j]! >= 0) namedBefore[j] = survey.row[namedBefore[j]!]!;
		if (trackOf[j]! >= 0) trackOf[j] = survey.row[trackOf[j]!]!;
	}
	return { trackOf, namedBefore, moved };
}

/** Candidate of each person, −1 for none. */
function matchInsideGate(
	survey: Survey,
	persons: readonly PersonMeasurement[],
	gate: number,
	rule: TrackerRule
): Int32Array {
	// Persons by x, so that a track only meets those within its own reach.
	const order = Int32Array.from(persons.keys());
	if (order.length > 1) order.sort((a, b) => persons[a]!.x - persons[b]!.x);
	const xs = new Float64Array(order.length);
	let noise = 0;
	for (let k = 0; k < xs.length; k += 1) {
		const { x, sd } = persons[order[k]!]!;
		xs[k] = x;
		noise = Math.max(noise, sd * sd);
	}
	const least = new Float64Array(persons.length).fill(Infinity);
	const edges = new Edges();
	for (let e = 0; e < survey.candidates; e += 1) {
		const radius = Math.sqrt(gate * (survey.variance[e]! + noise));
		const end = survey.x[e]! + radius;
		for (let k = lowerBound(xs, survey.x[e]! - radius); k < xs.length && xs[k]! <= end; k += 1) {
			const j = order[k]!;
			const person = persons[j]!;
			const variance = survey.variance[e]! + person.sd * person.sd;
			const d2 = distanceSquared(survey, e, person) / variance;
			if (d2 > gate) continue;
			const spread = 2 * Math.log(variance); // ln |S| of a round S
			if (spread < least[j]!) least[j] = spread;
			const named = survey.name[e] === person.localId;
			edges.add(j, e, d2 + spread - (named ? rule.hintBonus : 0));
		}
	}
	let widest = 0;
	for (let i = 0; i < edges.size; i += 1) {
		edges.cost[i]! -= least[edges.row[i]!]!;
		widest = Math.max(widest, edges.cost[i]!);
	}
	// Leaving both out costs at least as much as any pair that is allowed.
	return solveEdges(edges, persons.length, survey.candidates, Math.max(gate, widest));
}

/** Second pass: fills `trackOf` and `taken` for persons left over by the first. */
function matchTurns(
	survey: Survey,
	table: TrackTable,
	persons: readonly PersonMeasurement[],
	trackOf: Int32Array,
	taken: Uint8Array,
	gate: number,
	rule: TrackerRule
): void {
	const edges = new Edges();
	for (let e = 0; e < survey.candidates; e += 1) {
		const elapsed = survey.elapsed[e]!;
		if (survey.name[e] === null || elapsed < 0 || elapsed > FOLLOW_FOR || taken[e] === 1) continue;
		const row = survey.row[e]!;
		for (let j = 0; j < persons.length; j += 1) {
			if (trackOf[j]! >= 0) continue;
			const person = persons[j]!;
			const own = person.sd * person.sd;
			const distance = Math.hypot(person.x - table.x[row]!, person.y - table.y[row]!);
			const spread = Math.sqrt(gate * (table.variance[row]! + survey.alignment[e]! + own));
			const named = survey.name[e] === person.localId;
			const near = named && distanceSquared(survey, e, person) <= FAR * (survey.variance[e]! + own);
			const walked = rule.maxSpeed * (named ? elapsed : Math.min(elapsed, UNNAMED_FOR));
			if (near || distance <= spread + walked) edges.add(j, e, distance - (named ? NAME_WORTH : 0));
		}
	}
	if (edges.size === 0) return;
	const sparse = edges.toSparse(persons.length, survey.candidates);
	const found = solveSparse(sparse, mostPairsPrice(sparse));
	for (let j = 0; j < found.length; j += 1) {
		if (found[j]! < 0) continue;
		trackOf[j] = found[j]!;
		taken[found[j]!] = 1;
	}
}

/** m; in the second pass a name outweighs any distance somebody can walk meanwhile. */
const NAME_WORTH = 10;

function distanceSquared(survey: Survey, e: number, person: PersonMeasurement): number {
	const dx = survey.x[e]! - person.x;
	const dy = survey.y[e]! - person.y;
	return dx * dx + dy * dy;
}

/** Allowed pairs, in any order. */
class Edges {
	size = 0;
	readonly row: number[] = [];
	readonly column: number[] = [];
	readonly cost: number[] = [];

	add(row: number, column: number, cost: number): void {
		this.row.push(row);
		this.column.push(column);
		this.cost.push(cost);
		this.size += 1;
	}

	toSparse(rows: number, columns: number): SparseCosts {
		const starts = new Int32Array(rows + 1);
		for (let i = 0; i < this.size; i += 1) starts[this.row[i]! + 1]! += 1;
		for (let row = 0; row < rows; row += 1) starts[row + 1]! += starts[row]!;
		const next = starts.slice();
		const targets = new Int32Array(this.size);
		const costs = new Float64Array(this.size);
		for (let i = 0; i < this.size; i += 1) {
			const at = next[this.row[i]!]!++;
			targets[at] = this.column[i]!;
			costs[at] = this.cost[i]!;
		}
		return { rows, columns, starts, targets, costs };
	}
}

/** `solveSparse` for edges of which most have no rival: those are pairs, being worth no more than `price`. */
function solveEdges(edges: Edges, rows: number, columns: number, price: number): Int32Array {
	const found = new Int32Array(rows).fill(-1);
	const ofRow = new Int32Array(rows);
	const ofColumn = new Int32Array(columns);
	for (let i = 0; i < edges.size; i += 1) {
		ofRow[edges.row[i]!]! += 1;
		ofColumn[edges.column[i]!]! += 1;
	}
	const rivals = new Edges();
	for (let i = 0; i < edges.size; i += 1) {
		const row = edges.row[i]!;
		const column = edges.column[i]!;
		if (ofRow[row] === 1 && ofColumn[column] === 1) found[row] = column;
		else rivals.add(row, column, edges.cost[i]!);
	}
	if (rivals.size === 0) return found;
	const solved = solveSparse(rivals.toSparse(rows, columns), price);
	for (let row = 0; row < rows; row += 1) if (solved[row]! >= 0) found[row] = solved[row]!;
	return found;
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
