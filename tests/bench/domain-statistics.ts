/** Statistics beside their straightforward forms: the same answer from plain arrays and the formula as it is usually written. */

import { fitPoisson } from '../../src/lib/domain/statistics/glm.ts';
import { fitIsotonicRates } from '../../src/lib/domain/statistics/isotonic.ts';

interface BenchPart {
	readonly name: string;
	readonly ours: () => void;
	readonly straightforward: () => void;
	/** Wanted time of one run of `ours` on one core */
	readonly target_ms: number;
}

const ROWS = 10_000;
const COLUMNS = 4;
const BANDS = 4_000;

/** What `npm run bench` measures of the statistics. Inputs are made once, the same on every run. */
export function statisticsParts(): BenchPart[] {
	const random = lcg(7);
	const counts: number[] = [];
	const exposures: number[] = [];
	const design: number[] = [];
	for (let i = 0; i < ROWS; i++) {
		const density = 3 * random();
		const zone = i % 3;
		const hours = 0.2 + 3 * random();
		const mean = hours * Math.exp(-1 + 0.6 * density + 0.2 * zone);
		design.push(1, density, +(zone === 1), +(zone === 2));
		exposures.push(hours);
		counts.push(Math.max(0, Math.round(mean + Math.sqrt(mean) * (random() + random() + random() - 1.5) * 2)));
	}
	const data = {
		counts: Float64Array.from(counts),
		exposures: Float64Array.from(exposures),
		design: Float64Array.from(design),
		columns: COLUMNS
	};
	const rows = counts.map((_, i) => design.slice(i * COLUMNS, (i + 1) * COLUMNS));

	const bandCounts = Array.from({ length: BANDS }, (_, i) => Math.round(20 * random() + i / 400));
	const bandHours = Array.from({ length: BANDS }, () => 1 + 10 * random());

	return [
		{
			name: `Poisson regression, ${ROWS} rows × ${COLUMNS} columns`,
			ours: () => void fitPoisson(data),
			straightforward: () => void textbookPoisson(counts, exposures, rows),
			target_ms: 50
		},
		{
			name: `Isotonic rates, ${BANDS} bands`,
			ours: () => void fitIsotonicRates(bandCounts, bandHours),
			straightforward: () => void textbookIsotonic(bandCounts, bandHours),
			target_ms: 5
		}
	];
}

/** Iteratively reweighted least squares with lists of lists and an explicit inverse, to the same precision. */
function textbookPoisson(counts: number[], exposures: number[], rows: number[][]): number[] {
	const p = rows[0]!.length;
	let eta = counts.map((y) => Math.log(y + 0.1));
	let beta: number[] = new Array(p).fill(0);
	for (let step = 0; step < 80; step++) {
		const mu = eta.map(Math.exp);
		const z = eta.map((e, i) => e - Math.log(exposures[i]!) + (counts[i]! - mu[i]!) / mu[i]!);
		const columns = beta.map((_, j) => rows.map((row) => row[j]!));
		const information = columns.map((a) => columns.map((b) => a.reduce((sum, v, i) => sum + v * b[i]! * mu[i]!, 0)));
		const right = columns.map((a) => a.reduce((sum, v, i) => sum + v * z[i]! * mu[i]!, 0));
		beta = invert(information).map((row) => row.reduce((sum, v, j) => sum + v * right[j]!, 0));
		const next = rows.map((row, i) => row.reduce((sum, v, j) => sum + v * beta[j]!, Math.log(exposures[i]!)));
		const change = next.reduce((most, e, i) => Math.max(most, Math.abs(e - eta[i]!)), 0);
		eta = next;
		if (change < 1e-11) break;
	}
	return beta;
}

/** Gauss–Jordan with the largest pivot. */
function invert(matrix: number[][]): number[][] {
	const n = matrix.length;
	const work = matrix.map((row, i) => [...row, ...matrix.map((_, j) => +(i === j))]);
	for (let c = 0; c < n; c++) {
		let best = c;
		for (let r = c; r < n; r++) if (Math.abs(work[r]![c]!) > Math.abs(work[best]![c]!)) best = r;
		[work[c], work[best]] = [work[best]!, work[c]!];
		const pivot = work[c]![c]!;
		work[c] = work[c]!.map((v) => v / pivot);
		for (let r = 0; r < n; r++) {
			if (r !== c) work[r] = work[r]!.map((v, j) => v - work[r]![c]! * work[c]![j]!);
		}
	}
	return work.map((row) => row.slice(n));
}

/** Merges the first pair out of order and starts again, until none is. */
function textbookIsotonic(counts: number[], exposures: number[]): number[] {
	const pools = counts.map((count, i) => ({ count, hours: exposures[i]!, size: 1 }));
	for (let i = 0; i + 1 < pools.length;) {
		const [a, b] = [pools[i]!, pools[i + 1]!];
		if (a.count / a.hours > b.count / b.hours) {
			pools.splice(i, 2, { count: a.count + b.count, hours: a.hours + b.hours, size: a.size + b.size });
			i = 0;
		} else i++;
	}
	return pools.flatMap(({ count, hours, size }) => new Array<number>(size).fill(count / hours));
}

/** Repeatable numbers in [0, 1). */
function lcg(seed: number): () => number {
	let state = seed >>> 0;
	return () => (state = (Math.imul(state, 1664525) + 1013904223) >>> 0) / 2 ** 32;
}
