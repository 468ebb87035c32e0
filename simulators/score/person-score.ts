/** Fused persons against the true ones on floor that was observed: number, places, doubles and losses. */

import type { FloorModel } from '../../src/lib/domain/engine/floor-model.ts';
import { cellIndex } from '../../src/lib/domain/geometry/grid.ts';
import type { Point } from '../../src/lib/domain/geometry/types.ts';
import { assignMostPairs } from '../../src/lib/domain/tracking/assignment.ts';
import { computeOspa } from '../../src/lib/domain/tracking/ospa.ts';
import type { Population } from '../crowd/population.ts';

/** m within which a fused person can be a true one; also what OSPA charges for one too many or too few. */
const PERSON_WITHIN_M = 1;

interface PersonFigures {
	/** Fused over true; null when nobody was there */
	readonly ratio: number | null;
	/** Shares of the true persons */
	readonly lost: number | null;
	readonly doubled: number | null;
	readonly ghosts: number | null;
	/** m, mean over the moments looked at */
	readonly ospa: number | null;
}

export class PersonScore {
	#fused = 0;
	#truly = 0;
	#pictures = 0;
	#inPictures = 0;
	#ospa = 0;
	#lost = 0;
	#doubled = 0;
	#ghosts = 0;

	/**
	 * @param observed 1 per cell of the floor's grid seen within the window
	 * @param points 2n, x then y, fused persons on observed floor
	 * @param matched whether persons are also paired one by one, which costs more
	 */
	add(model: FloorModel, observed: Uint8Array, points: Float64Array, people: Population, matched: boolean): void {
		const truth: Point[] = [];
		for (let i = 0; i < people.end; i++) {
			const [x, y] = [people.x[i]!, people.y[i]!];
			const cell = people.alive[i] ? cellIndex(model.grid, x, y) : -1;
			if (cell >= 0 && observed[cell] === 1) truth.push({ x, y });
		}
		this.#truly += truth.length;
		this.#fused += points.length / 2;
		if (!matched) return;
		const fused = Array.from({ length: points.length / 2 }, (_, i) => ({ x: points[2 * i]!, y: points[2 * i + 1]! }));
		this.#pictures++;
		this.#inPictures += truth.length;
		this.#ospa += computeOspa(truth, fused, PERSON_WITHIN_M, 1).distance;
		const costs = truth.map((person) => fused.map((track) => Math.hypot(track.x - person.x, track.y - person.y)));
		const { pairs } = assignMostPairs(costs, PERSON_WITHIN_M);
		this.#lost += truth.length - pairs.length;
		const taken = new Set(pairs.map(([, column]) => column));
		for (const [column] of fused.entries()) {
			if (taken.has(column)) continue;
			if (costs.some((row) => row[column]! <= PERSON_WITHIN_M)) this.#doubled++;
			else this.#ghosts++;
		}
	}

	figures(): PersonFigures {
		const share = (count: number) => (this.#inPictures > 0 ? count / this.#inPictures : null);
		return {
			ratio: this.#truly > 0 ? this.#fused / this.#truly : null,
			lost: share(this.#lost),
			doubled: share(this.#doubled),
			ghosts: share(this.#ghosts),
			ospa: this.#pictures > 0 ? this.#ospa / this.#pictures : null
		};
	}
}
