/** Likelihood intervals of one coefficient: better than Wald when counts are few. */

import { bad, requireShare } from './check.ts';
import type { CountRows } from './count-data.ts';
import { normalQuantile } from './distributions.ts';
import type { PoissonFit } from './glm.ts';
import { fitLogLinear } from './log-linear.ts';
import { findRoot, searchOutward } from './root.ts';

/**
 * Profile-likelihood interval of a Poisson coefficient, log scale: all values at which, the other coefficients fitted anew,
 * the log-likelihood stays within half a χ² quantile of its maximum (Venables & Ripley 2002, §8.4; from memory).
 * A side is null where the model cannot be fitted far enough out. Costs some twenty fits a side.
 */
export function computeProfileInterval(
	fit: PoissonFit,
	column: number,
	confidence = 0.95
): { lower: number | null; upper: number | null } {
	const estimate = fit.coefficients[column];
	if (estimate === undefined) throw bad(`The model has no column ${column}.`);
	// The χ² quantile with one degree of freedom is the square of the normal one.
	const drop = normalQuantile(1 - (1 - requireShare(confidence, 'Confidence')) / 2) ** 2 / 2;
	const best = logLikelihood(fit.rows.counts, fit.means);
	const others = withoutColumn(fit.rows, column);
	const margin = (value: number): number => {
		const offsets = fit.rows.logExposures.map(
			(log, i) => log + value * fit.rows.design[i * fit.rows.columns + column]!
		);
		const means = others === null ? offsets.map(Math.exp) : meansOf(others, offsets);
		return means === null ? NaN : logLikelihood(fit.rows.counts, means) - best + drop;
	};
	const side = (width: number): number | null => {
		const outside = searchOutward(margin, estimate, width);
		if (outside === null) return null;
		return width < 0 ? findRoot(margin, outside, estimate) : findRoot(margin, estimate, outside);
	};
	const width = 2 * fit.standardErrors[column]!;
	return { lower: side(-width), upper: side(width) };
}

/** Up to a constant. */
function logLikelihood(counts: Float64Array, means: Float64Array): number {
	let sum = 0;
	for (let i = 0; i < counts.length; i++) {
		sum += (counts[i]! > 0 ? counts[i]! * Math.log(means[i]!) : 0) - means[i]!;
	}
	return sum;
}

function meansOf(rows: CountRows, offsets: Float64Array): Float64Array | null {
	const fit = fitLogLinear(rows, 0, offsets);
	return fit.kind === 'none' ? null : fit.means;
}

/** The rows with one column taken out; null when it was the only one. */
function withoutColumn(rows: CountRows, column: number): CountRows | null {
	if (rows.columns === 1) return null;
	const design = rows.design.filter((_, at) => at % rows.columns !== column);
	return { ...rows, columns: rows.columns - 1, design };
}
