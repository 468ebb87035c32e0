/** The closest curve that never falls, by pooling neighbours that are out of order. */

import { bad, requireAmount, requireSameLength } from './check.ts';

/**
 * Least-squares fit that never falls, all weights equal (pool adjacent violators; Barlow, Bartholomew, Bremner & Brunk 1972).
 * Linear in time. No values: no fit. The input is kept.
 *
 * @throws Failure 'bad_input' for a value that is not finite
 */
export function fitIsotonic(values: ArrayLike<number>): Float64Array {
	const sums = Float64Array.from(values);
	const wrong = sums.find((value) => !Number.isFinite(value));
	if (wrong !== undefined) throw bad(`A value must be finite, not ${wrong}.`);
	return pool(sums, new Float64Array(sums.length).fill(1));
}

export interface IsotonicRates {
	/** Count over exposure per band; null where there was no exposure */
	readonly raw: (number | null)[];
	/** The rates that never fall from band to band; null where there was no exposure */
	readonly fit: (number | null)[];
	/** Σ fit × exposure: equals the sum of the counts */
	readonly expectedTotal: number;
}

/**
 * Event rates that never fall from band to band: the maximum-likelihood fit for Poisson counts. Pooled bands get the sum of
 * their counts over the sum of their exposures, not the mean of their rates.
 *
 * @throws Failure 'bad_input' for unequal lengths, negative or non-finite numbers, events without exposure
 */
export function fitIsotonicRates(counts: ArrayLike<number>, exposures: ArrayLike<number>): IsotonicRates {
	requireSameLength(counts, exposures, 'Counts and exposures');
	const measured: number[] = [];
	for (let i = 0; i < counts.length; i++) {
		requireAmount(counts[i]!, 'A count');
		requireAmount(exposures[i]!, 'Exposure');
		if (exposures[i]! > 0) measured.push(i);
		else if (counts[i]! > 0) throw bad(`${counts[i]} events without any exposure cannot be a rate.`);
	}
	const pooled = pool(
		Float64Array.from(measured, (i) => counts[i]!),
		Float64Array.from(measured, (i) => exposures[i]!)
	);
	const raw: (number | null)[] = new Array(counts.length).fill(null);
	const fit: (number | null)[] = new Array(counts.length).fill(null);
	let expectedTotal = 0;
	measured.forEach((band, k) => {
		raw[band] = counts[band]! / exposures[band]!;
		fit[band] = pooled[k]!;
		expectedTotal += pooled[k]! * exposures[band]!;
	});
	return { raw, fit, expectedTotal };
}

/** Means Σsum/Σweight over the pools, one per entry. All weights are above 0. */
function pool(sums: Float64Array, weights: Float64Array): Float64Array {
	const n = sums.length;
	const poolSum = new Float64Array(n);
	const poolWeight = new Float64Array(n);
	const poolSize = new Uint32Array(n);
	let top = -1;
	for (let i = 0; i < n; i++) {
		top++;
		poolSum[top] = sums[i]!;
		poolWeight[top] = weights[i]!;
		poolSize[top] = 1;
		while (top > 0 && poolSum[top - 1]! / poolWeight[top - 1]! > poolSum[top]! / poolWeight[top]!) {
			top--;
			poolSum[top] = poolSum[top]! + poolSum[top + 1]!;
			poolWeight[top] = poolWeight[top]! + poolWeight[top + 1]!;
			poolSize[top] = poolSize[top]! + poolSize[top + 1]!;
		}
	}
	const fit = new Float64Array(n);
	let at = 0;
	for (let k = 0; k <= top; k++) {
		const end = at + poolSize[k]!;
		fit.fill(poolSum[k]! / poolWeight[k]!, at, end);
		at = end;
	}
	return fit;
}
