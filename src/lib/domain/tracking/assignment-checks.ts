/** What to know about an assignment beside its pairs: is it the only best one, and what would nearest-first have cost? */

import { assignMostPairs, assignWithinGate, type Assignment, type Costs } from './assignment.ts';

/** Costs closer than this count as equal. */
const SAME = 1e-9;

/** True when no other pairing has as many pairs at the same total cost. */
export function isOnlyMostPairs(costs: Costs, { pairs, total }: Assignment, gate = Infinity): boolean {
	return pairs.every((pair) => {
		const other = assignMostPairs(withoutPair(costs, pair), gate);
		return other.pairs.length < pairs.length || other.total > total + SAME;
	});
}

/** True when no other pairing, with more, fewer or other pairs, has the same total cost. */
export function isOnlyWithinGate(costs: Costs, { pairs, total }: Assignment, gate: number): boolean {
	if (pairs.some((pair) => assignWithinGate(withoutPair(costs, pair), gate).total <= total + SAME)) return false;
	// Every other best pairing now holds all these pairs and more, and what it adds costs just what it saves.
	const rows = new Set(pairs.map(([row]) => row));
	const columns = new Set(pairs.map(([, column]) => column));
	return !costs.some(
		(row, i) => !rows.has(i) && row.some((cost, j) => !columns.has(j) && Math.abs(cost - gate) <= SAME)
	);
}

/** What nearest-first pairing would cost; only to show how far it is from the optimum. Rows, then columns, break ties. */
export function computeGreedyTotal(costs: Costs): number {
	const all = costs.flatMap((row, i) => row.map((cost, j) => ({ cost, i, j }))).filter(({ cost }) => cost < Infinity);
	all.sort((a, b) => a.cost - b.cost || a.i - b.i || a.j - b.j);
	const rows = new Set<number>();
	const columns = new Set<number>();
	let total = 0;
	for (const { cost, i, j } of all) {
		if (rows.has(i) || columns.has(j)) continue;
		rows.add(i);
		columns.add(j);
		total += cost;
	}
	return total;
}

const withoutPair = (costs: Costs, [row, column]: readonly [number, number]): Costs =>
	costs.map((own, i) => (i === row ? own.map((cost, j) => (j === column ? Infinity : cost)) : own));
