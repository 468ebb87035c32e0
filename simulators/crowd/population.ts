/** The people on one floor as flat arrays, one slot each, and a grid to find who is near. */

import type { Bounds } from '../../src/lib/domain/geometry/types.ts';
import type { DistanceField } from '../core/nav-grid.ts';

/** How somebody moves. */
export const STANDING = 0;
export const WALKING = 1;
/** Walks straight at a spot that keeps moving, for example beside a robot. */
export const FOLLOWING = 2;

/** m; side of the cells people are sorted into. */
export const HASH_CELL = 1.25;

export interface NewPerson {
	readonly x: number;
	readonly y: number;
	/** m/s, walks at when free */
	readonly speed: number;
	/** m */
	readonly radius: number;
	/** Whether this person makes way for a robot that asks for it. */
	readonly yields: boolean;
	readonly group: number;
}

export class Population {
	/** Slots in use are below this; some of them may be empty. */
	end = 0;
	count = 0;
	readonly alive: Uint8Array;
	/** Never used again for somebody else. */
	readonly uid: Float64Array;
	readonly x: Float64Array;
	readonly y: Float64Array;
	readonly vx: Float64Array;
	readonly vy: Float64Array;
	readonly speed: Float64Array;
	readonly radius: Float64Array;
	readonly mode: Uint8Array;
	readonly yields: Uint8Array;
	/** Members of one group share a number; 0 is nobody's group. */
	readonly group: Int32Array;
	readonly goalX: Float64Array;
	readonly goalY: Float64Array;
	/** Unit direction the person wants to walk in. */
	readonly wayX: Float64Array;
	readonly wayY: Float64Array;
	/** s the person has wanted to walk and could not */
	readonly held: Float64Array;
	readonly field: (DistanceField | null)[];
	readonly #free: number[] = [];
	#lastUid = 0;

	readonly #minX: number;
	readonly #minY: number;
	readonly cols: number;
	readonly rows: number;
	readonly head: Int32Array;
	readonly next: Int32Array;

	constructor(
		bounds: Bounds,
		readonly capacity = 2048
	) {
		const numbers = () => new Float64Array(capacity);
		this.alive = new Uint8Array(capacity);
		this.uid = numbers();
		this.x = numbers();
		this.y = numbers();
		this.vx = numbers();
		this.vy = numbers();
		this.speed = numbers();
		this.radius = numbers();
		this.mode = new Uint8Array(capacity);
		this.yields = new Uint8Array(capacity);
		this.group = new Int32Array(capacity);
		this.goalX = numbers();
		this.goalY = numbers();
		this.wayX = numbers();
		this.wayY = numbers();
		this.held = numbers();
		this.field = Array.from({ length: capacity }, () => null);
		this.#minX = bounds.minX;
		this.#minY = bounds.minY;
		this.cols = Math.max(1, Math.ceil((bounds.maxX - bounds.minX) / HASH_CELL));
		this.rows = Math.max(1, Math.ceil((bounds.maxY - bounds.minY) / HASH_CELL));
		this.head = new Int32Array(this.cols * this.rows);
		this.next = new Int32Array(capacity);
	}

	/** Slot of the new person, −1 when the floor's arrays are full. */
	add(person: NewPerson): number {
		const slot = this.#free.pop() ?? (this.end < this.capacity ? this.end++ : -1);
		if (slot < 0) return -1;
		this.alive[slot] = 1;
		this.uid[slot] = ++this.#lastUid;
		this.x[slot] = this.goalX[slot] = person.x;
		this.y[slot] = this.goalY[slot] = person.y;
		this.vx[slot] = this.vy[slot] = this.wayX[slot] = this.wayY[slot] = this.held[slot] = 0;
		this.speed[slot] = person.speed;
		this.radius[slot] = person.radius;
		this.yields[slot] = person.yields ? 1 : 0;
		this.group[slot] = person.group;
		this.mode[slot] = STANDING;
		this.field[slot] = null;
		this.count++;
		return slot;
	}

	remove(slot: number): void {
		if (!this.alive[slot]) return;
		this.alive[slot] = 0;
		this.field[slot] = null;
		this.#free.push(slot);
		this.count--;
	}

	columnOf(x: number): number {
		return Math.min(this.cols - 1, Math.max(0, Math.floor((x - this.#minX) / HASH_CELL)));
	}

	rowOf(y: number): number {
		return Math.min(this.rows - 1, Math.max(0, Math.floor((y - this.#minY) / HASH_CELL)));
	}

	/** Sorts everybody into cells; `head`/`next` are linked lists that end with −1. */
	sort(): void {
		this.head.fill(-1);
		for (let i = this.end - 1; i >= 0; i--) {
			if (!this.alive[i]) continue;
			const cell = this.rowOf(this.y[i]!) * this.cols + this.columnOf(this.x[i]!);
			this.next[i] = this.head[cell]!;
			this.head[cell] = i;
		}
	}

	/** Calls back with every slot within `radius` of a point. As fresh as the last `sort`. */
	near(x: number, y: number, radius: number, visit: (slot: number, distance: number) => void): void {
		const lastColumn = this.columnOf(x + radius);
		const lastRow = this.rowOf(y + radius);
		for (let row = this.rowOf(y - radius); row <= lastRow; row++) {
			for (let column = this.columnOf(x - radius); column <= lastColumn; column++) {
				for (let i = this.head[row * this.cols + column]!; i >= 0; i = this.next[i]!) {
					if (!this.alive[i]) continue;
					const dx = this.x[i]! - x;
					const dy = this.y[i]! - y;
					const d2 = dx * dx + dy * dy;
					if (d2 <= radius * radius) visit(i, Math.sqrt(d2));
				}
			}
		}
	}
}
