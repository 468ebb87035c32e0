/** What never changes while a floor is live: its grid, walls and zones, worked out once. */

import type { Floor, Zone } from '../floor.ts';
import { cellAreasWithin, createFloorGrid, type FloorGrid, type ZoneCells } from '../geometry/grid.ts';
import { edgesOf, isInside } from '../geometry/polygon.ts';
import { createWallIndex, type WallIndex } from '../geometry/walls.ts';

export interface ZoneModel {
	readonly zone: Zone;
	/** Cells of the zone with their walkable area inside it, m² */
	readonly cells: ZoneCells;
}

export interface FloorModel {
	readonly floor: Floor;
	readonly grid: FloorGrid;
	/** Walls that block sight */
	readonly sight: WallIndex;
	/** Walls a robot cannot pass */
	readonly solid: WallIndex;
	readonly zones: readonly ZoneModel[];
	readonly privateZones: readonly Zone[];
	/** Walkable area of the floor, m² */
	readonly walkableArea: number;
	/** 1 for cells that lie in a private zone: never observed, whoever looks */
	readonly privateCell: Uint8Array;
}

/** @throws Failure 'bad_input' when the walkable polygon has no area */
export function createFloorModel(floor: Floor, cell = 0.5): FloorModel {
	const grid = createFloorGrid(floor.walkable, cell);
	const edges = edgesOf(floor.walkable);
	const privateZones = floor.zones.filter((zone) => zone.private);
	const privateCell = new Uint8Array(grid.cols * grid.rows);
	for (let index = 0; index < privateCell.length; index++) {
		const x = grid.sampleX[index]!;
		const y = grid.sampleY[index]!;
		if (privateZones.some((zone) => isInside(zone.polygon, x, y))) privateCell[index] = 1;
	}
	return {
		floor,
		grid,
		sight: createWallIndex(floor.edgesBlockSight ? [...edges, ...floor.walls] : [...floor.walls]),
		solid: createWallIndex([...edges, ...floor.walls]),
		zones: floor.zones.map((zone) => ({ zone, cells: cellAreasWithin(grid, floor.walkable, zone.polygon) })),
		privateZones,
		walkableArea: grid.area.reduce((sum, area) => sum + area, 0),
		privateCell
	};
}

/** Key of the first zone that holds the point, or null. Zones may overlap: the smallest wins. */
export function zoneAt(model: FloorModel, x: number, y: number): string | null {
	let found: ZoneModel | null = null;
	for (const candidate of model.zones) {
		if (found && candidate.cells.total >= found.cells.total) continue;
		if (isInside(candidate.zone.polygon, x, y)) found = candidate;
	}
	return found?.zone.key ?? null;
}

export const isPrivate = (model: FloorModel, x: number, y: number): boolean =>
	model.privateZones.some((zone) => isInside(zone.polygon, x, y));
