/** Density of a whole floor on its grid, for the heat layer. */

import { Failure } from '../failure.ts';
import { cellIndex, type FloorGrid } from '../geometry/grid.ts';

/** Kernels end at this many radii; what lies beyond, exp(−9) or 0.012 % of the weight, goes to the rest. Chosen by us. */
const REACH = 3;

/**
 * Persons/m² per cell by the Gaussian kernel of `kernelWeight` at the middle of each cell, corrected per person
 * (Diggle 1985) over the observed floor: Σ density · area over observed cells is the number of persons whose own cell
 * is observed. Everybody else – in an unobserved cell, off the floor, not finite – is left out.
 *
 * @param observed 1 per cell that was seen; every other cell, like every cell without floor, is NaN ("not measured")
 * @param points 2n, x then y, m
 * @param radius R in m, with σ = R/√2; larger is smoother and slower, with its square
 * @throws Failure 'bad_input' when the radius is not positive or `observed` does not fit the grid
 */
export function computeDensityField(
	grid: FloorGrid,
	observed: Uint8Array,
	points: Float64Array,
	radius: number
): Float32Array {
	const { x0, y0, cell, cols, rows, area } = grid;
	if (!(radius > 0)) throw new Failure('bad_input', 'The kernel radius must be positive.');
	if (observed.length !== area.length)
		throw new Failure('bad_input', 'One mark per cell says whether it was observed.');
	const seenArea = new Float64Array(area.length);
	for (let i = 0; i < area.length; i++) seenArea[i] = observed[i] === 1 ? area[i]! : 0;
	const sum = new Float64Array(area.length);
	const span = Math.ceil((2 * REACH * radius) / cell) + 2;
	const alongX = new Float64Array(span);
	const alongY = new Float64Array(span);
	for (let i = 0; i + 1 < points.length; i += 2) {
		const x = points[i]!;
		const y = points[i + 1]!;
		const home = cellIndex(grid, x, y);
		if (home < 0 || seenArea[home] === 0) continue;
		const fromCol = Math.max(0, Math.floor((x - REACH * radius - x0) / cell));
		const toCol = Math.min(cols - 1, Math.floor((x + REACH * radius - x0) / cell));
		const fromRow = Math.max(0, Math.floor((y - REACH * radius - y0) / cell));
		const toRow = Math.min(rows - 1, Math.floor((y + REACH * radius - y0) / cell));
		// exp(−d²/R²) is a product over x and y; what is constant cancels with the mass.
		fillWeights(alongX, x0 + (fromCol + 0.5) * cell - x, cell, toCol - fromCol, radius);
		fillWeights(alongY, y0 + (fromRow + 0.5) * cell - y, cell, toRow - fromRow, radius);
		let mass = 0;
		for (let row = fromRow; row <= toRow; row++) {
			const base = row * cols + fromCol;
			let line = 0;
			for (let k = 0; k <= toCol - fromCol; k++) line += alongX[k]! * seenArea[base + k]!;
			mass += line * alongY[row - fromRow]!;
		}
		// A kernel much smaller than a cell may weigh nothing at any middle: the person's own cell takes it all.
		if (!(mass > 1e-300)) {
			sum[home]! += 1 / seenArea[home]!;
			continue;
		}
		for (let row = fromRow; row <= toRow; row++) {
			const base = row * cols + fromCol;
			const share = alongY[row - fromRow]! / mass;
			for (let k = 0; k <= toCol - fromCol; k++) sum[base + k]! += alongX[k]! * share;
		}
	}
	const field = new Float32Array(area.length);
	for (let i = 0; i < field.length; i++) field[i] = seenArea[i]! > 0 ? sum[i]! : NaN;
	return field;
}

function fillWeights(weights: Float64Array, first: number, step: number, last: number, radius: number): void {
	for (let k = 0; k <= last; k++) weights[k] = Math.exp(-(((first + k * step) / radius) ** 2));
}
