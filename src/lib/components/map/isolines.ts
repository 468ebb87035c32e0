/** Lines of equal density through the field: marching squares between cell centres (Lorensen & Cline 1987, in the plane). */

import type { LiveField } from '../../contracts/live.ts';
import { UNSEEN } from './field.ts';

/**
 * Segments along which density equals `level`, as x1, y1, x2, y2 in metres of the floor. Squares with an unseen corner
 * have none: there is no line where nothing was measured.
 *
 * @param cells as from `unpackField`
 * @param level persons/m², above 0
 * @param inside keeps only squares whose middle passes
 */
export function computeIsoline(
	cells: Uint8Array,
	field: LiveField,
	level: number,
	inside: (x: number, y: number) => boolean = () => true
): number[] {
	const { cols, rows, cell_m: cell } = field;
	const target = (level / field.max_per_m2) * 254;
	const lines: number[] = [];
	for (let row = 0; row + 1 < rows; row++) {
		for (let col = 0; col + 1 < cols; col++) {
			const at = row * cols + col;
			const a = cells[at] ?? UNSEEN;
			const b = cells[at + 1] ?? UNSEEN;
			const c = cells[at + cols + 1] ?? UNSEEN;
			const d = cells[at + cols] ?? UNSEEN;
			const high = (a >= target ? 1 : 0) | (b >= target ? 2 : 0) | (c >= target ? 4 : 0) | (d >= target ? 8 : 0);
			if (high === 0 || high === 15 || a === UNSEEN || b === UNSEEN || c === UNSEEN || d === UNSEEN) continue;
			const x = field.x0_m + (col + 0.5) * cell;
			const y = field.y0_m + (row + 0.5) * cell;
			if (inside(x + cell / 2, y + cell / 2)) cutSquare(lines, [a, b, c, d], target, high, x, y, cell);
		}
	}
	return lines;
}

/** Sides: 0 bottom (a–b), 1 right (b–c), 2 top (d–c), 3 left (a–d). Saddles (5, 10) separate the two high corners. */
const CUTS: Record<number, readonly (readonly [number, number])[]> = {
	1: [[3, 0]],
	2: [[0, 1]],
	3: [[3, 1]],
	4: [[1, 2]],
	5: [
		[3, 0],
		[1, 2]
	],
	6: [[0, 2]],
	7: [[3, 2]],
	8: [[2, 3]],
	9: [[0, 2]],
	10: [
		[0, 1],
		[2, 3]
	],
	11: [[1, 2]],
	12: [[3, 1]],
	13: [[0, 1]],
	14: [[3, 0]]
};

function cutSquare(
	lines: number[],
	[a, b, c, d]: readonly [number, number, number, number],
	target: number,
	high: number,
	x: number,
	y: number,
	cell: number
): void {
	const part = (from: number, to: number) => ((target - from) / (to - from)) * cell;
	const end = (side: number): [number, number] => {
		switch (side) {
			case 0:
				return [x + part(a, b), y];
			case 1:
				return [x + cell, y + part(b, c)];
			case 2:
				return [x + part(d, c), y + cell];
			default:
				return [x, y + part(a, d)];
		}
	};
	for (const [one, other] of CUTS[high] ?? []) lines.push(...end(one), ...end(other));
}
