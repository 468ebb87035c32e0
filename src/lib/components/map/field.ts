/** The density field as it comes over the line: unpacked into cells, and painted into an image. */

import type { LiveField } from '../../contracts/live.ts';

/** Value of a cell that nobody has seen in the window. */
export const UNSEEN = 255;
const TOP = 254;

/**
 * Cell values row by row from the lower left: 0…254 of `max_per_m2`, 255 unseen. Whatever the runs do not reach is
 * unseen; what goes beyond the grid is dropped.
 */
export function unpackField(field: LiveField): Uint8Array {
	const cells = new Uint8Array(field.cols * field.rows).fill(UNSEEN);
	const runs = atob(field.cells);
	let at = 0;
	for (let i = 0; i + 1 < runs.length && at < cells.length; i += 2) {
		const end = at + runs.charCodeAt(i + 1);
		cells.fill(runs.charCodeAt(i), at, end);
		at = end;
	}
	return cells;
}

/** persons/m² of a cell value; NaN when unseen. */
export const densityOf = (value: number, maxPerM2: number): number =>
	value === UNSEEN ? NaN : (value / TOP) * maxPerM2;

/**
 * Paints cells into RGBA, top row first. An unseen cell is fully transparent, so that the hatching below shows; a seen
 * and empty one is opaque.
 *
 * @param ramp colours by density, 3 bytes each, the last for `rampMaxPerM2` and more
 */
export function paintField(
	cells: Uint8Array,
	field: LiveField,
	ramp: Uint8Array,
	rampMaxPerM2: number,
	into: Uint8ClampedArray
): void {
	const last = ramp.length / 3 - 1;
	const scale = (field.max_per_m2 / TOP / rampMaxPerM2) * last;
	for (let row = 0; row < field.rows; row++) {
		const from = (field.rows - 1 - row) * field.cols;
		let to = row * field.cols * 4;
		for (let col = 0; col < field.cols; col++, to += 4) {
			const value = cells[from + col] ?? UNSEEN;
			const step = value === UNSEEN ? 0 : Math.min(last, Math.round(value * scale)) * 3;
			into[to] = ramp[step] ?? 0;
			into[to + 1] = ramp[step + 1] ?? 0;
			into[to + 2] = ramp[step + 2] ?? 0;
			into[to + 3] = value === UNSEEN ? 0 : 255;
		}
	}
}
