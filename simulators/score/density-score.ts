/** Measured zone densities against the heads that were truly there, by how much of the zone was seen. */

import type { FloorModel } from '../../src/lib/domain/engine/floor-model.ts';
import type { ZoneResult } from '../../src/lib/domain/engine/frame.ts';
import { cellIndex } from '../../src/lib/domain/geometry/grid.ts';
import { isInside } from '../../src/lib/domain/geometry/polygon.ts';
import type { Population } from '../crowd/population.ts';

/** Lower ends of the bands of coverage. */
export const COVERAGE_BANDS = [0.3, 0.6, 0.9] as const;

interface DensityFigures {
	readonly results: number;
	/** (mean measured − mean true) / mean true, true of the whole zone; null when nobody was there, or nothing was measured */
	readonly bias: number | null;
	/** The same against those who truly stood on the part of the zone that was seen, over its area */
	readonly biasOnSeen: number | null;
	/** As `biasOnSeen`, of the classic density, heads over area */
	readonly biasClassic: number | null;
	/** persons/m² */
	readonly rmse: number | null;
}

interface Sum {
	results: number;
	measured: number;
	classic: number;
	truly: number;
	onSeen: number;
	squares: number;
}

export class DensityScore {
	readonly #bands: Sum[] = COVERAGE_BANDS.map(() => ({
		results: 0,
		measured: 0,
		classic: 0,
		truly: 0,
		onSeen: 0,
		squares: 0
	}));

	/** Takes one result per zone of a floor and the people on it at that moment. Zones that were not measured do not count. */
	add(model: FloorModel, zones: readonly ZoneResult[], observed: Uint8Array, people: Population): void {
		for (const [index, { density, classic, coverage, observedArea }] of zones.entries()) {
			const { zone, cells } = model.zones[index]!;
			const band = this.#bands[COVERAGE_BANDS.findLastIndex((from) => coverage >= from)];
			if (density === null || !band || cells.total === 0) continue;
			let heads = 0;
			let onSeen = 0;
			for (let i = 0; i < people.end; i++) {
				const [x, y] = [people.x[i]!, people.y[i]!];
				if (!people.alive[i] || !isInside(zone.polygon, x, y)) continue;
				heads++;
				const cell = cellIndex(model.grid, x, y);
				if (cell >= 0 && observed[cell] === 1) onSeen++;
			}
			const truly = heads / cells.total;
			band.results++;
			band.measured += density;
			band.classic += classic ?? 0;
			band.truly += truly;
			band.onSeen += observedArea > 0 ? onSeen / observedArea : 0;
			band.squares += (density - truly) ** 2;
		}
	}

	/** @param from index of the first band taken in, `to` of the first one left out */
	figures(from: number, to: number = COVERAGE_BANDS.length): DensityFigures {
		const total: Sum = { results: 0, measured: 0, classic: 0, truly: 0, onSeen: 0, squares: 0 };
		for (const band of this.#bands.slice(from, to)) {
			total.results += band.results;
			total.measured += band.measured;
			total.classic += band.classic;
			total.truly += band.truly;
			total.onSeen += band.onSeen;
			total.squares += band.squares;
		}
		return {
			results: total.results,
			bias: total.truly > 0 ? total.measured / total.truly - 1 : null,
			biasOnSeen: total.onSeen > 0 ? total.measured / total.onSeen - 1 : null,
			biasClassic: total.onSeen > 0 ? total.classic / total.onSeen - 1 : null,
			rmse: total.results > 0 ? Math.sqrt(total.squares / total.results) : null
		};
	}
}
