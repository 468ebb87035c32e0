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
}

/** Cost of every row (first index) with every column. */
export type Costs = readonly (readonly number[])[];

/** As many pairs as possible, then least total cost. Costs that are not finite, or above the gate, are forbidden pairs. */
export function assignMostPairs(costs: Costs, gate = Infinity): Assignment {
	const sparse = allowedPairs(costs, gate);
	const pairs = pairUp(sparse, mostPairsPrice(sparse));
	return { pairs, total: sumOf(costs, pairs) };
}

/**
 * Least total cost when every unpaired row and every unpaired column costs gate/2, so that a pair is kept only if it
 * costs no more than leaving both out. Pairs above the gate and costs that are not finite are forbidden.
 */
export function assignWithinGate(costs: Costs, gate: number): Assignment {
	const sparse = allowedPairs(costs, gate);
	const pairs = pairUp(sparse, gate);
	const unpaired = sparse.rows + sparse.columns - 2 * pairs.length;
	return { pairs, total: sumOf(costs, pairs) + (gate / 2) * unpaired };
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

function allowedPairs(costs: Costs, gate: number): SparseCosts {
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

const pairUp = (problem: SparseCosts, price: number): [number, number][] =>
	Array.from(solveSparse(problem, price), (column, row): [number, number] => [row, column]).filter(([, c]) => c >= 0);

const sumOf = (costs: Costs, pairs: Assignment['pairs']): number =>
	pairs.reduce((sum, [row, column]) => sum + costs[row]![column]!, 0);
