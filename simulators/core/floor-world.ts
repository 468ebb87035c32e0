/** One simulated floor: its people, where they can walk, and where robots can drive. */

import type { Bounds, Point, Similarity } from '../../src/lib/domain/geometry/types.ts';
import { Life, type LifeOptions } from '../crowd/life.ts';
import { Population } from '../crowd/population.ts';
import { Walking, type RobotBody } from '../crowd/walking.ts';
import type { PhaseNow } from '../crowd/timetable.ts';
import type { PlaceKind, VenueFloor } from '../venue/model.ts';
import { computeDistanceField, createNavGrid, isInsideRing, type DistanceField, type NavGrid } from './nav-grid.ts';
import type { Random } from './random.ts';

/**
 * m the centre of a person or a robot keeps from walls when planning its way: more than half a cell, since the cells on both
 * sides of a wall that runs along their edges must not count as neighbours.
 */
const WALK_CLEARANCE = 0.26;
const DRIVE_CLEARANCE = 0.55;
/** Where people stand about: robots are routed round it if they can be. */
const SHUNNED: readonly PlaceKind[] = ['table', 'audience', 'counter', 'lift', 'lounge'];

export class FloorWorld {
	readonly people: Population;
	readonly life: Life;
	readonly walking: Walking;
	readonly driveGrid: NavGrid;
	readonly #fields: Map<string, DistanceField>;

	constructor(
		readonly model: VenueFloor,
		random: Random,
		options: LifeOptions
	) {
		const walkGrid = gridOf(model, WALK_CLEARANCE, []);
		this.driveGrid = gridOf(
			model,
			DRIVE_CLEARANCE,
			model.places.filter(({ kind }) => SHUNNED.includes(kind))
		);
		this.#fields = fieldsOf(this.driveGrid);
		this.people = new Population(walkGrid.walls.bounds, Math.max(64, options.peak * 2));
		this.walking = new Walking(this.people, walkGrid, random.fork('walking'));
		this.life = new Life(this.people, walkGrid, model.places, random.fork('life'), options);
	}

	step(dt: number, time: number, now: PhaseNow, robots: readonly RobotBody[]): void {
		this.life.step(dt, time, now, robots);
		this.walking.step(dt, robots);
	}

	/** Distance field of a robot's goal; worked out once per goal. */
	fieldTo(goal: Point): DistanceField {
		const key = `${goal.x.toFixed(2)},${goal.y.toFixed(2)}`;
		let field = this.#fields.get(key);
		if (!field) {
			field = computeDistanceField(this.driveGrid, [goal]);
			if (this.#fields.size > 200) this.#fields.clear();
			this.#fields.set(key, field);
		}
		return field;
	}

	/** True persons/m² per zone, in the floor's order: heads inside over the zone's walkable area. */
	zoneDensities(): number[] {
		const areas = (this.#zoneAreas ??= this.model.floor.zones.map((zone) => this.#walkableArea(zone.polygon.outer)));
		const counts = this.model.floor.zones.map(() => 0);
		for (let i = 0; i < this.people.end; i++) {
			if (!this.people.alive[i]) continue;
			const at = this.model.floor.zones.findIndex(({ polygon }) =>
				isInsideRing(polygon.outer, this.people.x[i]!, this.people.y[i]!)
			);
			if (at >= 0) counts[at]!++;
		}
		return counts.map((count, k) => (areas[k]! > 0 ? count / areas[k]! : NaN));
	}
	#zoneAreas: number[] | null = null;

	/** m², by counting points 0.25 m apart. */
	#walkableArea(ring: readonly (readonly [number, number])[]): number {
		const { outer, holes } = this.model.floor.walkable;
		const xs = ring.map(([x]) => x);
		const ys = ring.map(([, y]) => y);
		let points = 0;
		for (let x = Math.min(...xs) + 0.125; x < Math.max(...xs); x += 0.25) {
			for (let y = Math.min(...ys) + 0.125; y < Math.max(...ys); y += 0.25) {
				if (!isInsideRing(ring, x, y) || !isInsideRing(outer, x, y)) continue;
				if (!holes.some((hole) => isInsideRing(hole, x, y))) points++;
			}
		}
		return points / 16;
	}
}

/** Grids and fields follow from the drawing alone, so every world of one process shares them. */
const grids = new WeakMap<VenueFloor, Map<number, NavGrid>>();
const fields = new WeakMap<NavGrid, Map<string, DistanceField>>();

function gridOf(model: VenueFloor, clearance: number, shunned: readonly Bounds[]): NavGrid {
	const known = grids.get(model) ?? new Map<number, NavGrid>();
	grids.set(model, known);
	const grid = known.get(clearance) ?? createNavGrid(model.floor, clearance, shunned);
	known.set(clearance, grid);
	return grid;
}

function fieldsOf(grid: NavGrid): Map<string, DistanceField> {
	const known = fields.get(grid) ?? new Map<string, DistanceField>();
	fields.set(grid, known);
	return known;
}

/** Turns floor coordinates into a robot's own map: the inverse of the map's similarity, ready for many points. */
export class MapFrame {
	readonly #cos: number;
	readonly #sin: number;

	constructor(
		readonly name: string,
		readonly toFloor: Similarity
	) {
		this.#cos = Math.cos(toFloor.rotation) / toFloor.scale;
		this.#sin = Math.sin(toFloor.rotation) / toFloor.scale;
	}

	x(floorX: number, floorY: number): number {
		return this.#cos * (floorX - this.toFloor.tx) + this.#sin * (floorY - this.toFloor.ty);
	}

	y(floorX: number, floorY: number): number {
		return this.#cos * (floorY - this.toFloor.ty) - this.#sin * (floorX - this.toFloor.tx);
	}

	/** Direction vectors turn but do not shift. */
	dx(floorX: number, floorY: number): number {
		return this.#cos * floorX + this.#sin * floorY;
	}

	dy(floorX: number, floorY: number): number {
		return this.#cos * floorY - this.#sin * floorX;
	}

	heading(floorHeading: number): number {
		return floorHeading - this.toFloor.rotation;
	}

	/** A point of the robot's map on the floor, for the places named in commands. */
	toFloorPoint(x: number, y: number): Point {
		const { scale, rotation, tx, ty } = this.toFloor;
		const cos = scale * Math.cos(rotation);
		const sin = scale * Math.sin(rotation);
		return { x: cos * x - sin * y + tx, y: sin * x + cos * y + ty };
	}
}
