/** How full the floor is round one point, over what was observed there. */

import type { FloorModel } from './floor-model.ts';

export interface LocalDensity {
	/** persons/m² over observed floor; null when less than the least coverage was observed */
	readonly density: number | null;
	/** Observed share of the walkable floor in the disc, 0…1 */
	readonly coverage: number;
	/** Persons on observed floor in the disc */
	readonly persons: number;
}

/**
 * Classic density in the disc of `radius` metres round (x, y).
 *
 * @param observed 1 per observed cell
 * @param points 2n, x then y, persons on observed floor only
 */
export function computeLocalDensity(
	model: FloorModel,
	observed: Uint8Array,
	points: Float64Array,
	x: number,
	y: number,
	radius: number,
	leastCoverage: number
): LocalDensity {
	const { seen, walkable } = discAreas(model, observed, x, y, radius);
	let persons = 0;
	for (let i = 0; i < points.length; i += 2) {
		const dx = points[i]! - x;
		const dy = points[i + 1]! - y;
		if (dx * dx + dy * dy <= radius * radius) persons += 1;
	}
	const coverage = walkable > 0 ? seen / walkable : 0;
	return { density: coverage >= leastCoverage && seen > 0 ? persons / seen : null, coverage, persons };
}

/** Observed share of the walkable floor within `radius` of (x, y), 0…1; 0 when there is no floor. */
export function computeObservedShare(
	model: FloorModel,
	observed: Uint8Array,
	x: number,
	y: number,
	radius: number
): number {
	const { seen, walkable } = discAreas(model, observed, x, y, radius);
	return walkable > 0 ? seen / walkable : 0;
}

function discAreas(model: FloorModel, observed: Uint8Array, x: number, y: number, radius: number) {
	const { grid } = model;
	const fromCol = Math.max(0, Math.floor((x - radius - grid.x0) / grid.cell));
	const toCol = Math.min(grid.cols - 1, Math.floor((x + radius - grid.x0) / grid.cell));
	const fromRow = Math.max(0, Math.floor((y - radius - grid.y0) / grid.cell));
	const toRow = Math.min(grid.rows - 1, Math.floor((y + radius - grid.y0) / grid.cell));
	let seen = 0;
	let walkable = 0;
	for (let row = fromRow; row <= toRow; row++) {
		for (let col = fromCol; col <= toCol; col++) {
			const index = row * grid.cols + col;
			const area = grid.area[index]!;
			if (area === 0) continue;
			const dx = grid.x0 + (col + 0.5) * grid.cell - x;
			const dy = grid.y0 + (row + 0.5) * grid.cell - y;
			if (dx * dx + dy * dy > radius * radius) continue;
			walkable += area;
			if (observed[index] === 1) seen += area;
		}
	}
	return { seen, walkable };
}
