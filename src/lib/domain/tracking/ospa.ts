/** How far two sets of points are from each other when both places and number may be wrong. */

import type { Point } from '../geometry/types.ts';
import { assignMostPairs } from './assignment.ts';

export interface OspaDistance {
	/** 0…cutoff, metres */
	readonly distance: number;
	/** The part that comes from places; with order p the parts add as powers: d^p = l^p + n^p */
	readonly localisation: number;
	/** The part that comes from the difference in number */
	readonly cardinality: number;
}

/**
 * OSPA distance (Schuhmacher, Vo & Vo 2008): ((min Σ min(c, d)^p + c^p (n − m)) / n)^(1/p) with m ≤ n points.
 *
 * Two empty sets are 0 apart; an empty and a non-empty one are `cutoff` apart.
 *
 * @param cutoff m, > 0; what a missing or a surplus point costs
 * @param order ≥ 1; the larger, the more single large errors count
 */
export function computeOspa(a: readonly Point[], b: readonly Point[], cutoff: number, order: number): OspaDistance {
	const [few, many] = a.length <= b.length ? [a, b] : [b, a];
	const n = many.length;
	if (n === 0) return { distance: 0, localisation: 0, cardinality: 0 };
	const costs = few.map((p) => many.map((q) => Math.min(Math.hypot(p.x - q.x, p.y - q.y), cutoff) ** order));
	const places = assignMostPairs(costs).total;
	const number = cutoff ** order * (n - few.length);
	const root = (sum: number) => (sum / n) ** (1 / order);
	return { distance: root(places + number), localisation: root(places), cardinality: root(number) };
}
