/** Who belongs to whom: the cheapest one-to-one pairing of rows and columns, with pairs that may be forbidden. */

// Own code because the libraries at hand want a square, dense matrix and stand in for "forbidden" with a large number,
// which gives wrong pairings; here a forbidden pair is simply absent.

/** The pairs that are allowed, row by row: edges of row r are at starts[r] … starts[r + 1] − 1. */
export interface SparseCosts {
	readonly rows: number;
	readonly columns: number;
	readonly starts: Int32Array;
	readonly targets: Int32Array;
	readonly costs: Float64Array;
}

export interface Assignment {
	/** [row, column], by row */
	readonly pairs: readonly (readonly [row: number, column: number])[];
	/** Sum of the costs of the pairs, plus what leaving rows and columns unpaired costs under the convention used */
	readonly total: number;
	/** False when another pairing costs the same */
	readonly unique: boolean;
}

/** Costs closer than this count as equal when uniqueness is judged. */
const SAME = 1e-9;

/** As many pairs as possible, then least total cost. Costs that are not finite are forbidden pairs. */
export function assignMostPairs(costs: readonly (readonly number[])[], gate = Infinity): Assignment {
	const sparse = sparseFrom(costs, gate);
	const best = pairUp(sparse, mostPairsPrice(sparse));
	const total = sumOf(costs, best);
	const unique = best.every(([row, column]) => {
		const without = withoutPair(sparse, row, column);
		const other = pairUp(without, mostPairsPrice(without));
		return other.length < best.length || sumOf(costs, other) > total + SAME;
	});
	return { pairs: best, total, unique };
}

/**
 * Least total cost when every unpaired row and every unpaired column costs gate/2, so that a pair is kept only if it
 * costs less than leaving both out. Pairs above the gate and costs that are not finite are forbidden.
 */
export function assignWithinGate(costs: readonly (readonly number[])[], gate: number): Assignment {
	const sparse = sparseFrom(costs, gate);
	const unpaired = (pairs: readonly unknown[]) => (gate / 2) * (sparse.rows + sparse.columns - 2 * pairs.length);
	const best = pairUp(sparse, gate);
	const total = sumOf(costs, best) + unpaired(best);
	const unique =
		best.every(([row, column]) => {
			const other = pairUp(withoutPair(sparse, row, column), gate);
			return sumOf(costs, other) + unpaired(other) > total + SAME;
		}) && !canAddForFree(costs, sparse, best, gate);
	return { pairs: best, total, unique };
}

/** What nearest-first pairing would cost; only to show how far it is from the optimum. Rows, then columns, break ties. */
export function computeGreedyTotal(costs: readonly (readonly number[])[]): number {
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

/**
 * Column of each row, −1 for none: least Σ cost + Σ `price` over rows left out.
 *
 * Shortest augmenting paths with potentials (Jonker & Volgenant 1987; Crouse 2016 for rectangular problems, both from
 * memory). A search touches only what its row can reach, so unconnected groups of a large, sparse problem never meet.
 * O(n³) at worst, nearly linear when few pairs compete.
 */
export function solveSparse(problem: SparseCosts, price: number): Int32Array {
	const { rows, columns, starts, targets, costs } = problem;
	const columnOf = new Int32Array(rows).fill(-1);
	const rowOf = new Int32Array(columns).fill(-1);
	const potential = new Float64Array(columns);
	const distance = new Float64Array(columns).fill(Infinity);
	const cameFrom = new Int32Array(columns).fill(-1);
	const settled = new Uint8Array(columns);
	// Columns reached by the present search; the first `done` of them are settled.
	const reached = new Int32Array(columns);

	for (let start = 0; start < rows; start += 1) {
		let count = 0;
		let done = 0;
		let row = start;
		let base = 0;
		// The cheapest way to end so far: leave `leaving` out, at a length of `leavingAt`.
		let leaving = -1;
		let leavingAt = Infinity;
		let end = -1;
		for (;;) {
			const held = columnOf[row]!;
			// Length up to this row less its own reduced cost: an edge adds cost − (cost of the edge it now holds).
			const offset = held < 0 ? base : base - edgeCost(problem, row, held) + potential[held]!;
			if (offset + price < leavingAt) {
				leavingAt = offset + price;
				leaving = row;
			}
			for (let e = starts[row]!; e < starts[row + 1]!; e += 1) {
				const column = targets[e]!;
				if (settled[column]) continue;
				const length = offset + costs[e]! - potential[column]!;
				if (length < distance[column]!) {
					if (distance[column] === Infinity) reached[count++] = column;
					distance[column] = length;
					cameFrom[column] = row;
				}
			}
			let nearest = -1;
			let nearestAt = Infinity;
			for (let k = done; k < count; k += 1) {
				const length = distance[reached[k]!]!;
				if (length > nearestAt) continue;
				if (length < nearestAt || comesFirst(reached[k]!, reached[nearest]!, rowOf)) {
					nearestAt = length;
					nearest = k;
				}
			}
			if (nearest < 0 || leavingAt < nearestAt) {
				base = leavingAt;
				break;
			}
			const column = reached[nearest]!;
			reached[nearest] = reached[done]!;
			reached[done++] = column;
			settled[column] = 1;
			base = nearestAt;
			if (rowOf[column]! < 0) {
				end = column;
				break;
			}
			row = rowOf[column]!;
		}
		for (let k = 0; k < done; k += 1) {
			const column = reached[k]!;
			potential[column]! -= base - distance[column]!;
		}
		flip(columnOf, rowOf, cameFrom, start, end, leaving);
		for (let k = 0; k < count; k += 1) {
			const column = reached[k]!;
			distance[column] = Infinity;
			settled[column] = 0;
		}
	}
	return columnOf;
}

/** Among equally near columns a free one ends the search at once; then the lower index, so that results do not vary. */
function comesFirst(a: number, b: number, rowOf: Int32Array): boolean {
	const free = Number(rowOf[a]! < 0) - Number(rowOf[b]! < 0);
	return free === 0 ? a < b : free > 0;
}

/** Walks the path found back to `start`, handing every column on it to the row before. */
function flip(
	columnOf: Int32Array,
	rowOf: Int32Array,
	cameFrom: Int32Array,
	start: number,
	end: number,
	leaving: number
): void {
	let column = end;
	if (column < 0) {
		// The path ends at a row that is left out; what it held goes to the row it was reached from.
		column = columnOf[leaving]!;
		columnOf[leaving] = -1;
		if (leaving === start) return;
	}
	for (;;) {
		const row = cameFrom[column]!;
		const before = columnOf[row]!;
		columnOf[row] = column;
		rowOf[column] = row;
		if (row === start) return;
		column = before;
	}
}

function edgeCost({ starts, targets, costs }: SparseCosts, row: number, column: number): number {
	let e = starts[row]!;
	while (targets[e] !== column) e += 1;
	return costs[e]!;
}

/** A price for leaving a row out above any saving that could come of it, taken from the costs themselves. */
export function mostPairsPrice({ rows, columns, costs }: SparseCosts): number {
	let least = Infinity;
	let most = -Infinity;
	for (const cost of costs) {
		if (cost < least) least = cost;
		if (cost > most) most = cost;
	}
	if (costs.length === 0) return 0;
	return Math.max(most, 0) + (most - least) * Math.min(rows, columns) + 1;
}

function sparseFrom(costs: readonly (readonly number[])[], gate: number): SparseCosts {
	const rows = costs.length;
	const columns = Math.max(0, ...costs.map((row) => row.length));
	const starts = new Int32Array(rows + 1);
	const targets: number[] = [];
	const kept: number[] = [];
	costs.forEach((row, i) => {
		row.forEach((cost, j) => {
			if (!Number.isFinite(cost) || cost > gate) return;
			targets.push(j);
			kept.push(cost);
		});
		starts[i + 1] = targets.length;
	});
	return { rows, columns, starts, targets: Int32Array.from(targets), costs: Float64Array.from(kept) };
}

function withoutPair(problem: SparseCosts, row: number, column: number): SparseCosts {
	const starts = problem.starts.map((start, r) => (r > row ? start - 1 : start));
	const rest = (_: number, e: number) =>
		e < problem.starts[row]! || e >= problem.starts[row + 1]! || problem.targets[e] !== column;
	return { ...problem, starts, targets: problem.targets.filter(rest), costs: problem.costs.filter(rest) };
}

const pairUp = (problem: SparseCosts, price: number): [number, number][] =>
	Array.from(solveSparse(problem, price), (column, row): [number, number] => [row, column]).filter(([, c]) => c >= 0);

const sumOf = (costs: readonly (readonly number[])[], pairs: readonly (readonly [number, number])[]): number =>
	pairs.reduce((sum, [row, column]) => sum + costs[row]![column]!, 0);

/** True when a pair exactly at the gate could join the pairing without changing its cost. */
function canAddForFree(
	costs: readonly (readonly number[])[],
	{ rows, starts, targets }: SparseCosts,
	pairs: readonly (readonly [number, number])[],
	gate: number
): boolean {
	const usedRows = new Set(pairs.map(([row]) => row));
	const usedColumns = new Set(pairs.map(([, column]) => column));
	for (let row = 0; row < rows; row += 1) {
		if (usedRows.has(row)) continue;
		for (let e = starts[row]!; e < starts[row + 1]!; e += 1) {
			if (!usedColumns.has(targets[e]!) && Math.abs(costs[row]![targets[e]!]! - gate) <= SAME) return true;
		}
	}
	return false;
}
