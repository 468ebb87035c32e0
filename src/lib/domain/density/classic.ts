/** Classic density: persons divided by the floor that was observed. */

import { intersect, unite } from '../geometry/clipping.ts';
import { cellIndex, type GridFrame } from '../geometry/grid.ts';
import { computeArea, isStrictlyInside } from '../geometry/polygon.ts';
import type { Area, Polygon } from '../geometry/types.ts';

export interface ClassicInput {
	/** 2n, x then y, m */
	readonly points: Float64Array;
	readonly measurement: Polygon;
	/** Null when all of the measurement polygon is floor. */
	readonly walkable: Polygon | null;
	/** Footprints of the sensors, which may overlap; null when all of it was seen. */
	readonly observed: readonly Polygon[] | null;
}

export interface ClassicDensity {
	/** persons/m² over the observed floor; null when none of it was observed */
	readonly density: number | null;
	/** Persons strictly inside the observed floor */
	readonly count: number;
	/** m² */
	readonly observedArea: number;
	/** Observed share of the walkable floor, 0…1; null when there is no floor */
	readonly coverage: number | null;
}

/**
 * Persons over observed walkable area in the measurement polygon. Overlapping footprints count once.
 * A person exactly on the border is not counted, so that neighbouring polygons never count anybody twice; positions
 * that are not finite are not counted either.
 */
export function computeClassicDensity({ points, measurement, walkable, observed }: ClassicInput): ClassicDensity {
	const floor = walkable ? intersect([measurement], [walkable]) : unite([[measurement]]);
	const seen = observed ? intersect(floor, unite(observed.map((polygon) => [polygon]))) : floor;
	const floorArea = computeArea(floor);
	const observedArea = computeArea(seen);
	const count = countInside(seen, points);
	return {
		density: observedArea > 0 ? count / observedArea : null,
		count,
		observedArea,
		coverage: floorArea > 0 ? observedArea / floorArea : null
	};
}

function countInside(area: Area, points: Float64Array): number {
	let count = 0;
	for (let i = 0; i + 1 < points.length; i += 2) {
		if (area.some((polygon) => isStrictlyInside(polygon, points[i]!, points[i + 1]!))) count += 1;
	}
	return count;
}

/** Persons in each cell of a grid, row by row; each person once, in the half-open cell that holds it. */
export function countByCell(grid: GridFrame, points: Float64Array): Uint32Array {
	const counts = new Uint32Array(grid.cols * grid.rows);
	for (let i = 0; i + 1 < points.length; i += 2) {
		const index = cellIndex(grid, points[i]!, points[i + 1]!);
		if (index >= 0) counts[index]! += 1;
	}
	return counts;
}
