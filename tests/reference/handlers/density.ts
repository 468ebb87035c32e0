/* eslint-disable @typescript-eslint/no-explicit-any -- reference inputs are plain JSON */
import { meanIndividualDensities } from '../../../src/lib/domain/density/averaging.ts';
import { computeClassicDensity, countByCell } from '../../../src/lib/domain/density/classic.ts';
import { createKernelDensity } from '../../../src/lib/domain/density/kernel.ts';
import { computeVoronoiDensity } from '../../../src/lib/domain/density/voronoi.ts';
import type { Polygon, Ring } from '../../../src/lib/domain/geometry/types.ts';

const flat = (points: any): Float64Array => Float64Array.from((points ?? []).flat());
const polygon = (outer: Ring): Polygon => ({ outer, holes: [] });
const floor = (walkable: any): Polygon => ({ outer: walkable.outer, holes: walkable.holes ?? [] });

function voronoi(input: any) {
	const got = computeVoronoiDensity({
		points: flat(input.points),
		walkable: floor(input.walkable),
		measurement: polygon(input.measurement),
		cutoff: input.cutoff_m == null ? null : { radius: input.cutoff_m }
	});
	return {
		density: got.density,
		density_own_piece: got.densityOwnPiece,
		measured_area_m2: got.measuredArea,
		n_used: got.used,
		n_outside_walkable: got.outsideWalkable,
		distinct_points: Array.from(got.multiplicity, (_, i) => [got.distinctPoints[2 * i], got.distinctPoints[2 * i + 1]]),
		multiplicity: [...got.multiplicity],
		cell_areas: [...got.cellAreas],
		cell_areas_own_piece: [...got.cellAreasOwnPiece]
	};
}

function kernel(input: any) {
	const density = createKernelDensity({
		points: flat(input.points),
		velocities: input.velocities ? flat(input.velocities) : null,
		walkable: floor(input.walkable),
		radius: input.R_m
	});
	return {
		kernel_mass_at_persons: density.massAtPersons,
		evaluations: input.evaluate_at.map(([x, y]: [number, number]) => {
			const got = density.at(x, y);
			return {
				at: [x, y],
				uncorrected: got.uncorrected,
				kernel_mass_at_point: got.massAtPoint,
				corrected_at_point: got.correctedAtPoint,
				corrected_per_person: got.correctedPerPerson,
				local_velocity: got.motion?.velocity ?? null,
				local_flow: got.motion?.flow ?? null,
				velocity_variance: got.motion?.velocityVariance ?? null,
				pressure_per_s2: got.motion?.pressure ?? null
			};
		})
	};
}

function classic(input: any) {
	if (input.individual_densities) {
		const means = meanIndividualDensities(input.individual_densities);
		return { arithmetic_mean: means?.arithmetic ?? null, harmonic_mean: means?.harmonic ?? null };
	}
	if (input.grid) {
		const { x0, y0, cell_m: cell, nx: cols, ny: rows } = input.grid;
		const counts = countByCell({ x0, y0, cell, cols, rows }, flat(input.points));
		return {
			cells: Array.from(counts, (count, i) => ({
				cell: [i % cols, Math.floor(i / cols)],
				count,
				density: count / (cell * cell)
			})),
			total: counts.reduce((sum, count) => sum + count, 0)
		};
	}
	const got = computeClassicDensity({
		points: flat(input.points),
		measurement: polygon(input.measurement),
		walkable: input.walkable ? floor(input.walkable) : null,
		observed: input.observed ? input.observed.map(polygon) : null
	});
	return {
		count_in_observed: got.count,
		observed_area_m2: got.observedArea,
		coverage: got.coverage,
		density: got.density
	};
}

export const handlers: Record<string, (input: any) => unknown> = { voronoi, kernel, classic };
