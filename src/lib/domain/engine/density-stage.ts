/** Density of a whole floor at one moment: who stands on observed floor, every zone, and the field. */

import { computeDensityField } from '../density/field.ts';
import { NO_LEVEL, stepLevel, type LevelState } from '../density/level-of-service.ts';
import { computeZoneVoronoi, type ZoneVoronoi } from '../density/voronoi.ts';
import { cellIndex } from '../geometry/grid.ts';
import { isInside } from '../geometry/polygon.ts';
import type { FloorModel, ZoneModel } from './floor-model.ts';
import type { FieldResult, PersonPoint, ZoneResult } from './frame.ts';
import { observedMask, type SeenAt } from './observed.ts';
import type { DensityRule } from './rules.ts';

export interface DensityStage {
	readonly time: number;
	/** 1 per cell seen within the window */
	readonly observed: Uint8Array;
	/** 2n, x then y: persons standing on observed floor */
	readonly points: Float64Array;
	readonly zones: readonly ZoneResult[];
	readonly levels: ReadonlyMap<string, LevelState>;
	readonly field: FieldResult | null;
	/** m² of walkable floor observed, and its share of the floor */
	readonly observedArea: number;
	readonly coverage: number;
}

export const noDensity = (model: FloorModel): DensityStage => ({
	time: -Infinity,
	observed: new Uint8Array(model.grid.cols * model.grid.rows),
	points: new Float64Array(0),
	zones: model.zones.map(({ zone }) => unmeasured(zone.key)),
	levels: new Map(),
	field: null,
	observedArea: 0,
	coverage: 0
});

const unmeasured = (key: string): ZoneResult => ({
	key,
	density: null,
	classic: null,
	coverage: 0,
	observedArea: 0,
	persons: 0,
	level: null,
	aboveThreshold: false
});

/** Persons on floor nobody observed within the window are left out above the line because their floor is left out below it. */
export function measureDensity(
	model: FloorModel,
	rule: DensityRule,
	persons: readonly PersonPoint[],
	seenAt: SeenAt,
	previous: DensityStage,
	now: number
): DensityStage {
	const observed = observedMask(seenAt, now, rule.windowS);
	const points = pointsOnObserved(model, observed, persons);
	const polygons = model.zones.map(({ zone }) => zone.polygon);
	const cutoff = { radius: rule.cutoffRadiusM };
	const voronoi = computeZoneVoronoi(points, model.floor.walkable, polygons, cutoff, {
		grid: model.grid,
		seen: observed
	});
	const levels = new Map<string, LevelState>();
	const zones = model.zones.map((zone, index) => {
		const was = previous.zones.find(({ key }) => key === zone.zone.key);
		const result = measureZone(rule, zone, voronoi[index]!, points, was?.aboveThreshold ?? false);
		const level = stepLevel(
			previous.levels.get(zone.zone.key) ?? NO_LEVEL,
			zone.zone.scheme,
			result.density,
			now,
			rule.level
		);
		levels.set(zone.zone.key, level);
		return { ...result, level: level.level };
	});
	let observedArea = 0;
	for (let index = 0; index < observed.length; index++) if (observed[index]) observedArea += model.grid.area[index]!;
	return {
		time: now,
		observed,
		points,
		zones,
		levels,
		field: { time: now, values: computeDensityField(model.grid, observed, points, rule.kernelRadiusM) },
		observedArea,
		coverage: observedArea / model.walkableArea
	};
}

function pointsOnObserved({ grid }: FloorModel, observed: Uint8Array, persons: readonly PersonPoint[]): Float64Array {
	const points = new Float64Array(2 * persons.length);
	let length = 0;
	for (const { x, y } of persons) {
		const index = cellIndex(grid, x, y);
		if (index < 0 || observed[index] === 0) continue;
		points[length++] = x;
		points[length++] = y;
	}
	return points.slice(0, length);
}

/** Share of its threshold a zone must fall below before it stops counting as above (chosen by us, against flicker). */
const RELEASE_SHARE = 0.9;

function measureZone(
	rule: DensityRule,
	{ zone, cells }: ZoneModel,
	voronoi: ZoneVoronoi,
	points: Float64Array,
	wasAbove: boolean
): Omit<ZoneResult, 'level'> {
	if (zone.private || cells.total === 0) return unmeasured(zone.key);
	const { measuredArea: observedArea, density } = voronoi;
	const coverage = voronoi.coverage ?? 0;
	let persons = 0;
	for (let i = 0; i < points.length; i += 2) if (isInside(zone.polygon, points[i]!, points[i + 1]!)) persons += 1;
	if (density === null || coverage < rule.leastCoverage) {
		return { ...unmeasured(zone.key), coverage, observedArea, persons };
	}
	const limit = zone.threshold === null ? Infinity : zone.threshold * (wasAbove ? RELEASE_SHARE : 1);
	return {
		key: zone.key,
		density,
		classic: persons / observedArea,
		coverage,
		observedArea,
		persons,
		aboveThreshold: density >= limit
	};
}
