/** Event counts with their exposure and what may explain them: the rows every rate model starts from. */

import { bad, requireAmount, requireCount, requireSameLength } from './check.ts';

/** One entry per row; all of equal length. Kept, not changed. */
export interface CountData {
	readonly counts: ArrayLike<number>;
	/** Robot-hours or any other unit, ≥ 0. A row without exposure must have no events and is left out. */
	readonly exposures: ArrayLike<number>;
	/** Design matrix row by row, `columns` numbers each, the column of ones included */
	readonly design: ArrayLike<number>;
	readonly columns: number;
}

/** Checked rows with exposure. Arrays are shared with the fits made from them: read only. */
export interface CountRows {
	readonly n: number;
	readonly columns: number;
	readonly counts: Float64Array;
	readonly exposures: Float64Array;
	readonly logExposures: Float64Array;
	/** n × columns, row by row */
	readonly design: Float64Array;
	/** Place of each row in the data it came from */
	readonly source: Uint32Array;
}

/** A design matrix written as one array per row, in the flat form models take. Ragged rows throw Failure 'bad_input'. */
export function flattenDesign(rows: readonly ArrayLike<number>[]): { design: Float64Array; columns: number } {
	const columns = rows[0]?.length ?? 0;
	const design = new Float64Array(rows.length * columns);
	rows.forEach((row, i) => {
		if (row.length !== columns) throw bad(`Row ${i} of the design has ${row.length} columns, the first ${columns}.`);
		design.set(row, i * columns);
	});
	return { design, columns };
}

/** The rows of a model, checked. @throws Failure 'bad_input' saying which number is wrong */
export function prepareRows(data: CountData): CountRows {
	const { counts, exposures, design, columns } = data;
	requireSameLength(counts, exposures, 'Counts and exposures');
	requireCount(columns, 'The number of columns');
	if (design.length !== counts.length * columns) {
		throw bad(`The design must have ${counts.length} × ${columns} numbers, not ${design.length}.`);
	}
	const kept: number[] = [];
	for (let i = 0; i < counts.length; i++) {
		requireCount(counts[i]!, 'A count');
		requireAmount(exposures[i]!, 'Exposure');
		if (exposures[i]! > 0) kept.push(i);
		else if (counts[i]! > 0) throw bad(`${counts[i]} events without any exposure cannot be a rate.`);
	}
	const flat = new Float64Array(kept.length * columns);
	kept.forEach((row, k) => {
		for (let j = 0; j < columns; j++) {
			const value = design[row * columns + j]!;
			if (!Number.isFinite(value)) throw bad(`Row ${row} of the design holds ${value}.`);
			flat[k * columns + j] = value;
		}
	});
	const times = Float64Array.from(kept, (i) => exposures[i]!);
	return {
		n: kept.length,
		columns,
		counts: Float64Array.from(kept, (i) => counts[i]!),
		exposures: times,
		logExposures: times.map(Math.log),
		design: flat,
		source: Uint32Array.from(kept)
	};
}
