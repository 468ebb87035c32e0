import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { computeGreedyTotal, isOnlyMostPairs, isOnlyWithinGate } from './assignment-checks.ts';
import { assignMostPairs, assignWithinGate, type Costs } from './assignment.ts';

/** Every one-to-one pairing there is, the slow and certain way. */
function allPairings(costs: Costs, row = 0, used: number[] = []): [number, number][][] {
	if (row === costs.length) return [[]];
	const without = allPairings(costs, row + 1, used);
	const withOne = costs[row]!.flatMap((_, column) =>
		used.includes(column)
			? []
			: allPairings(costs, row + 1, [...used, column]).map((rest): [number, number][] => [[row, column], ...rest])
	);
	return [...without, ...withOne];
}
const sum = (costs: Costs, pairs: readonly (readonly [number, number])[]) =>
	pairs.reduce((total, [i, j]) => total + costs[i]![j]!, 0);

/** Tables up to 4 × 4 with forbidden pairs and many ties. */
const table = fc.tuple(fc.integer({ min: 1, max: 4 }), fc.integer({ min: 1, max: 4 })).chain(([rows, columns]) => {
	const cost = fc.oneof({ weight: 5, arbitrary: fc.integer({ min: -3, max: 12 }) }, fc.constant(Infinity));
	const row = fc.array(cost, { minLength: columns, maxLength: columns });
	return fc.array(row, { minLength: rows, maxLength: rows });
});

describe('most pairs first', () => {
	it('trap: greedy matching can be arbitrarily bad (101 against 4)', () => {
		const costs = [
			[1, 2],
			[2, 100]
		];
		expect(computeGreedyTotal(costs)).toBe(101);
		expect(assignMostPairs(costs)).toEqual({
			pairs: [
				[0, 1],
				[1, 0]
			],
			total: 4
		});
	});

	it('pairs the smaller side completely when there are more columns than rows, or more rows than columns', () => {
		const wide = [
			[7, 5, 9, 8, 11],
			[9, 12, 7, 11, 9],
			[8, 5, 4, 6, 9]
		];
		const tall = wide[0]!.map((_, j) => wide.map((row) => row[j]!));
		expect(assignMostPairs(wide).total).toBe(18);
		expect(assignMostPairs(tall).total).toBe(18);
		expect(assignMostPairs(tall).pairs).toHaveLength(3);
	});

	it('trap: infinite costs give fewer pairs, never wrong ones', () => {
		expect(assignMostPairs([[Infinity, Infinity]])).toEqual({ pairs: [], total: 0 });
		const costs = [
			[1e9, Infinity],
			[1, 2]
		];
		expect(assignMostPairs(costs)).toEqual({
			pairs: [
				[0, 0],
				[1, 1]
			],
			total: 1e9 + 2
		});
	});

	it('finds what trying all pairings finds', () => {
		fc.assert(
			fc.property(table, (costs) => {
				const allowed = allPairings(costs).filter((pairs) => sum(costs, pairs) < Infinity);
				const most = Math.max(...allowed.map((pairs) => pairs.length));
				const totals = allowed.filter(({ length }) => length === most).map((pairs) => sum(costs, pairs));
				const best = assignMostPairs(costs);
				expect(best.pairs).toHaveLength(most);
				expect(best.total).toBe(Math.min(...totals));
				expect(isOnlyMostPairs(costs, best)).toBe(totals.filter((total) => total === best.total).length === 1);
			}),
			{ numRuns: 300 }
		);
	});

	it('returns nothing for an empty table', () => {
		expect(assignMostPairs([])).toEqual({ pairs: [], total: 0 });
		expect(assignMostPairs([[], []])).toEqual({ pairs: [], total: 0 });
	});
});

describe('within a gate', () => {
	it('trap: the two gated conventions differ', () => {
		const costs = [
			[8, 1],
			[20, 7]
		];
		expect(assignMostPairs(costs, 9.21).pairs).toEqual([
			[0, 0],
			[1, 1]
		]);
		const cheapest = assignWithinGate(costs, 9.21);
		expect(cheapest.pairs).toEqual([[0, 1]]);
		expect(cheapest.total).toBeCloseTo(10.21, 12);
	});

	it('leaves everybody out when nothing is inside the gate', () => {
		const nothing = assignWithinGate(
			[
				[Infinity, 10],
				[11, NaN]
			],
			9.21
		);
		expect(nothing.pairs).toEqual([]);
		expect(nothing.total).toBeCloseTo(18.42, 12);
	});

	it('finds what trying all pairings finds', () => {
		const gate = 7;
		fc.assert(
			fc.property(table, (costs) => {
				const inside = allPairings(costs).filter((pairs) => pairs.every(([i, j]) => costs[i]![j]! <= gate));
				const left = (pairs: unknown[]) => costs.length + costs[0]!.length - 2 * pairs.length;
				const totals = inside.map((pairs) => sum(costs, pairs) + (gate / 2) * left(pairs));
				const best = assignWithinGate(costs, gate);
				expect(best.total).toBe(Math.min(...totals));
				expect(isOnlyWithinGate(costs, best, gate)).toBe(totals.filter((total) => total === best.total).length === 1);
			}),
			{ numRuns: 300 }
		);
	});
});

it('solves a large problem of many small groups exactly', () => {
	const n = 300;
	// Groups of two where the nearest-first choice is wrong.
	const costs = Array.from({ length: n }, (_, i) =>
		Array.from({ length: n }, (_, j) => {
			if (i >> 1 !== j >> 1) return Infinity;
			return i % 2 === 0 ? [1, 2][j % 2]! : [2, 100][j % 2]!;
		})
	);
	expect(assignMostPairs(costs).total).toBe((n / 2) * 4);
});
