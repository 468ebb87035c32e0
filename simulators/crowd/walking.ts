/** How people move from one instant to the next: a social-force model with a time gap to the person ahead. */

import type { Point } from '../../src/lib/domain/geometry/types.ts';
import { distanceAt, nearestFree, type NavGrid } from '../core/nav-grid.ts';
import type { Random } from '../core/random.ts';
import { FOLLOWING, HASH_CELL, STANDING, WALKING, type Population } from './population.ts';

/** A robot as people meet it. */
export interface RobotBody {
	readonly x: number;
	readonly y: number;
	readonly vx: number;
	readonly vy: number;
	readonly radius: number;
	/** Unit direction in which the robot visibly wants to go; zero when it shows no wish to move. */
	readonly wantX: number;
	readonly wantY: number;
}

// Moussaïd et al. 2009, Experimental study of the behavioural mechanisms underlying self-organization in human crowds,
// Proc. R. Soc. B 276 (from memory): fitted interaction law.
const STRENGTH = 4.5;
const RANGE_PER_SPEED = 0.35;
const ANGLE_SIDE = 2;
const ANGLE_AHEAD = 3;
const VELOCITY_WEIGHT = 2;
const SIDE_BIAS = 0.005;
/** s, relaxation time; same source. */
const RELAXATION = 0.54;
/** Wall repulsion, m/s² and m; same source. */
const WALL_STRENGTH = 3;
const WALL_RANGE = 0.1;
/** Weight of what is outside the 200° of sight: Helbing & Molnár 1995, Social force model for pedestrian dynamics, PRE 51 (from memory). */
const BEHIND_WEIGHT = 0.5;
const COS_SIGHT = Math.cos((100 * Math.PI) / 180);

// A person walks no faster than (gap to the one ahead) / TIME_GAP, the speed law of Tordeux, Chraibi & Seyfried 2016,
// Collision-free speed model for pedestrian dynamics (from memory). The two numbers are fitted by us so that a corridor
// follows Weidmann's speed–density line.
const TIME_GAP = 0.45;
const BODY_LENGTH = 0.34;

/** m/s²; weaker forces are left out. */
const FAINT = 0.05;
/** m; people farther away do not matter. */
const REACH = 2.5;
/** m/s² and m/s; nobody accelerates or walks beyond these. */
const MOST_ACCELERATION = 5;
const MOST_OVER_SPEED = 1.3;
/** m beyond which a robot is not noticed. */
const ROBOT_REACH = 3;
/** m/s at which somebody steps out of a robot's way. */
const ASIDE_SPEED = 0.6;

/** Moves everybody on a floor. The object keeps scratch arrays only; all state is in the population. */
export class Walking {
	readonly #newVx: Float64Array;
	readonly #newVy: Float64Array;
	readonly #pushX: Float64Array;
	readonly #pushY: Float64Array;
	readonly #robotNear: Int16Array;
	readonly #robotGap: Float64Array;
	/** Steps left before somebody standing undisturbed is looked at again. */
	readonly #awake: Uint8Array;
	#tick = 0;

	constructor(
		readonly people: Population,
		readonly grid: NavGrid,
		readonly random: Random
	) {
		const n = people.capacity;
		this.#newVx = new Float64Array(n);
		this.#newVy = new Float64Array(n);
		this.#pushX = new Float64Array(n);
		this.#pushY = new Float64Array(n);
		this.#robotNear = new Int16Array(n);
		this.#robotGap = new Float64Array(n);
		this.#awake = new Uint8Array(n);
	}

	/** @param dt s, at most 0.2 */
	step(dt: number, robots: readonly RobotBody[]): void {
		const { people } = this;
		this.#tick++;
		people.sort();
		this.#noticeRobots(robots);
		this.#pushX.fill(0, 0, people.end);
		this.#pushY.fill(0, 0, people.end);
		for (let i = 0; i < people.end; i++) {
			if (!people.alive[i]) continue;
			if (this.#rests(i)) {
				this.#newVx[i] = this.#newVy[i] = 0;
				continue;
			}
			this.#decide(i, dt, robots);
		}
		for (let i = 0; i < people.end; i++) {
			if (people.alive[i]) this.#move(i, dt, robots);
		}
	}

	/** Standing where they want to be, nobody near who moves: nothing to work out. */
	#rests(i: number): boolean {
		const { people } = this;
		if (people.mode[i] !== STANDING || this.#robotNear[i]! >= 0) return false;
		if (this.#awake[i]! > 0) {
			this.#awake[i]!--;
			return false;
		}
		return Math.abs(people.x[i]! - people.goalX[i]!) < 0.3 && Math.abs(people.y[i]! - people.goalY[i]!) < 0.3;
	}

	#noticeRobots(robots: readonly RobotBody[]): void {
		const { people } = this;
		this.#robotNear.fill(-1, 0, people.end);
		for (let r = 0; r < robots.length; r++) {
			const robot = robots[r]!;
			people.near(robot.x, robot.y, ROBOT_REACH, (i, distance) => {
				const gap = distance - robot.radius;
				if (this.#robotNear[i]! >= 0 && gap >= this.#robotGap[i]!) return;
				this.#robotNear[i] = r;
				this.#robotGap[i] = gap;
			});
		}
	}

	#decide(i: number, dt: number, robots: readonly RobotBody[]): void {
		const { people } = this;
		const x = people.x[i]!;
		const y = people.y[i]!;
		const vx = people.vx[i]!;
		const vy = people.vy[i]!;
		const standing = people.mode[i] === STANDING;
		if (standing || people.mode[i] === FOLLOWING) this.#faceSpot(i);
		else if ((this.#tick + i) % 4 === 0 || (people.wayX[i] === 0 && people.wayY[i] === 0)) this.#faceGoal(i);
		let wayX = people.wayX[i]!;
		let wayY = people.wayY[i]!;
		let wish = wayX === 0 && wayY === 0 ? 0 : standing ? 0.5 : people.speed[i]!;
		let forceX = 0;
		let forceY = 0;
		let clear = Infinity;

		const lastColumn = people.columnOf(x + (standing ? HASH_CELL : REACH));
		const lastRow = people.rowOf(y + (standing ? HASH_CELL : REACH));
		const firstColumn = people.columnOf(x - (standing ? HASH_CELL : REACH));
		for (let row = people.rowOf(y - (standing ? HASH_CELL : REACH)); row <= lastRow; row++) {
			for (let column = firstColumn; column <= lastColumn; column++) {
				for (let j = people.head[row * people.cols + column]!; j >= 0; j = people.next[j]!) {
					if (j === i || !people.alive[j]) continue;
					const dx = people.x[j]! - x;
					const dy = people.y[j]! - y;
					const d2 = dx * dx + dy * dy;
					if (d2 > REACH * REACH) continue;
					const d = Math.sqrt(d2) || 1e-6;
					const ex = dx / d;
					const ey = dy / d;
					const touch = people.radius[i]! + people.radius[j]!;
					if (d < touch) this.#separate(i, j, ex, ey, touch - d);
					if (standing) continue;
					const ahead = dx * wayX + dy * wayY;
					const aside = Math.abs(dx * wayY - dy * wayX);
					// Somebody coming towards us steps aside as we do, so only those in the way block.
					if (ahead > 0 && aside < BODY_LENGTH) clear = Math.min(clear, ahead - BODY_LENGTH);
					const together = people.group[i] !== 0 && people.group[i] === people.group[j] ? 0.3 : 1;
					const weight = together * (ex * wayX + ey * wayY < COS_SIGHT ? BEHIND_WEIGHT : 1);
					const kx = VELOCITY_WEIGHT * (vx - people.vx[j]!) + ex;
					const ky = VELOCITY_WEIGHT * (vy - people.vy[j]!) + ey;
					const k = Math.sqrt(kx * kx + ky * ky) || 1e-6;
					const reach = RANGE_PER_SPEED * k;
					const fade = weight * STRENGTH * Math.exp(-d / reach);
					if (fade < FAINT) continue;
					const tx = kx / k;
					const ty = ky / k;
					const angle = Math.atan2(tx * ey - ty * ex, tx * ex + ty * ey) + reach * SIDE_BIAS;
					const back = fade * Math.exp(-((ANGLE_AHEAD * reach * angle) ** 2));
					const turn = fade * Math.sign(angle) * Math.exp(-((ANGLE_SIDE * reach * angle) ** 2));
					forceX -= back * tx - turn * ty;
					forceY -= back * ty + turn * tx;
				}
			}
		}

		const robot = robots[this.#robotNear[i]!];
		if (robot) {
			const dx = robot.x - x;
			const dy = robot.y - y;
			const d = Math.hypot(dx, dy) || 1e-6;
			const gap = d - robot.radius - people.radius[i]!;
			const ahead = dx * wayX + dy * wayY;
			// Nobody walks into a machine, yielding or not.
			if (wish > 0 && ahead > 0 && Math.abs(dx * wayY - dy * wayX) < robot.radius + people.radius[i]!) {
				clear = Math.min(clear, Math.max(0, gap - 0.05));
				if (gap < 1) forceX += this.#side(i, dx, dy, wayX, wayY) * -wayY * (1 - gap) * 1.5;
				if (gap < 1) forceY += this.#side(i, dx, dy, wayX, wayY) * wayX * (1 - gap) * 1.5;
			}
			if (people.yields[i] && people.mode[i] !== FOLLOWING) {
				const forward = -(dx * robot.wantX + dy * robot.wantY);
				const across = dx * robot.wantY - dy * robot.wantX;
				const asked = robot.wantX !== 0 || robot.wantY !== 0;
				if (asked && forward > 0 && gap < 1.5 && Math.abs(across) < robot.radius + people.radius[i]! + 0.2) {
					const side = across !== 0 ? -Math.sign(across) : people.uid[i]! % 2 ? 1 : -1;
					wayX = side * robot.wantY;
					wayY = side * -robot.wantX;
					wish = ASIDE_SPEED;
					clear = Infinity;
				} else if (!standing && gap < 2) {
					const fade = 2 * Math.exp(-gap / 0.4);
					forceX -= (fade * dx) / d;
					forceY -= (fade * dy) / d;
				}
			}
		}

		const wanted = Math.max(0, Math.min(wish, clear / TIME_GAP));
		if (people.mode[i] === WALKING) this.#noteHeld(i, wanted, dt);
		let ax = (wanted * wayX - vx) / RELAXATION + forceX;
		let ay = (wanted * wayY - vy) / RELAXATION + forceY;
		const a = Math.hypot(ax, ay);
		if (a > MOST_ACCELERATION) {
			ax *= MOST_ACCELERATION / a;
			ay *= MOST_ACCELERATION / a;
		}
		let nvx = vx + ax * dt;
		let nvy = vy + ay * dt;
		// The time gap holds whatever pushes from the sides: speed along the way is capped at once.
		const along = nvx * wayX + nvy * wayY;
		if (along > wanted && clear < Infinity) {
			nvx -= (along - wanted) * wayX;
			nvy -= (along - wanted) * wayY;
		}
		const most = standing ? ASIDE_SPEED : MOST_OVER_SPEED * people.speed[i]!;
		const v = Math.hypot(nvx, nvy);
		const scale = v > most ? most / v : 1;
		this.#newVx[i] = nvx * scale;
		this.#newVy[i] = nvy * scale;
	}

	/** Which way round an obstacle ahead: the side it leaves freer; straight ahead, each person's own habit. */
	#side(i: number, dx: number, dy: number, wayX: number, wayY: number): number {
		const left = wayX * dy - wayY * dx;
		return Math.abs(left) > 0.05 ? -Math.sign(left) : this.people.uid[i]! % 2 ? 1 : -1;
	}

	/** People who overlap are parted; somebody at rest is moved by whoever bumps into them. */
	#separate(i: number, j: number, ex: number, ey: number, depth: number): void {
		const share = 0.4 * depth;
		this.#pushX[i]! -= ex * share;
		this.#pushY[i]! -= ey * share;
		if (this.people.mode[j] === STANDING && this.#awake[j] === 0) {
			this.#pushX[j]! += ex * share;
			this.#pushY[j]! += ey * share;
			this.#awake[j] = 10;
		}
	}

	/** After 3 s of getting nowhere a person looks for a gap sideways. */
	#noteHeld(i: number, wanted: number, dt: number): void {
		const { people } = this;
		const moving = Math.hypot(people.vx[i]!, people.vy[i]!) > 0.15;
		people.held[i] = moving || wanted === 0 ? Math.max(0, people.held[i]! - dt) : people.held[i]! + dt;
		if (wanted === 0) people.held[i]! += dt;
		if (people.held[i]! < 3) return;
		people.held[i] = 0;
		const turn = this.random.between(-1.4, 1.4);
		const [wayX, wayY] = [people.wayX[i]!, people.wayY[i]!];
		people.wayX[i] = wayX * Math.cos(turn) - wayY * Math.sin(turn);
		people.wayY[i] = wayX * Math.sin(turn) + wayY * Math.cos(turn);
	}

	#faceSpot(i: number): void {
		this.#face(i, { x: this.people.goalX[i]!, y: this.people.goalY[i]! });
	}

	#face(i: number, spot: Point): void {
		const { people } = this;
		const dx = spot.x - people.x[i]!;
		const dy = spot.y - people.y[i]!;
		const d = Math.hypot(dx, dy);
		const there = d < 0.2;
		people.wayX[i] = there ? 0 : dx / d;
		people.wayY[i] = there ? 0 : dy / d;
	}

	/** Down the distance field, or straight to the spot once it is close and in plain view. */
	#faceGoal(i: number): void {
		const { people, grid } = this;
		const x = people.x[i]!;
		const y = people.y[i]!;
		const dx = people.goalX[i]! - x;
		const dy = people.goalY[i]! - y;
		const d = Math.hypot(dx, dy) || 1e-6;
		const field = people.field[i];
		if (!field || (d < 4 && !grid.walls.isBlocked(x, y, people.goalX[i]!, people.goalY[i]!))) {
			people.wayX[i] = dx / d;
			people.wayY[i] = dy / d;
			return;
		}
		const h = grid.cell;
		const here = distanceAt(grid, field, x, y);
		if (here === Infinity)
			return this.#face(i, nearestFree(grid, x, y) ?? { x: people.goalX[i]!, y: people.goalY[i]! });
		const slope = (ahead: number, behind: number) =>
			ahead === Infinity
				? behind === Infinity
					? 0
					: (here - behind) / h
				: behind === Infinity
					? (ahead - here) / h
					: (ahead - behind) / (2 * h);
		const cell = grid.index(x, y);
		const beside = cell >= 0 && grid.cost[cell]! > 1;
		// The other side of a wall may be nearer to the goal; nobody walks there through it.
		const probe = (toX: number, toY: number) =>
			beside && grid.walls.isBlocked(x, y, toX, toY) ? Infinity : distanceAt(grid, field, toX, toY);
		const gx = slope(probe(x + h, y), probe(x - h, y));
		const gy = slope(probe(x, y + h), probe(x, y - h));
		const g = Math.hypot(gx, gy);
		people.wayX[i] = g > 1e-6 ? -gx / g : dx / d;
		people.wayY[i] = g > 1e-6 ? -gy / g : dy / d;
	}

	/** Applies velocity and pushes, then keeps the person out of walls and robots. */
	#move(i: number, dt: number, robots: readonly RobotBody[]): void {
		const { people, grid } = this;
		const { walls, items, start } = grid.walls;
		const x0 = people.x[i]!;
		const y0 = people.y[i]!;
		if (this.#newVx[i] === 0 && this.#newVy[i] === 0 && this.#pushX[i] === 0 && this.#pushY[i] === 0) {
			people.vx[i] = people.vy[i] = 0;
			if (this.#robotNear[i]! < 0) return;
		}
		let x = x0 + this.#newVx[i]! * dt + this.#pushX[i]!;
		let y = y0 + this.#newVy[i]! * dt + this.#pushY[i]!;
		const robot = robots[this.#robotNear[i]!];
		if (robot) {
			const touch = robot.radius + people.radius[i]! * 0.8;
			const dx = x - robot.x;
			const dy = y - robot.y;
			const d = Math.hypot(dx, dy) || 1e-6;
			if (d < touch) {
				x = robot.x + (dx / d) * touch;
				y = robot.y + (dy / d) * touch;
			}
		}
		const cell = grid.walls.cellAt(x, y);
		const keep = people.radius[i]!;
		for (let k = start[cell]!; k < start[cell + 1]!; k++) {
			const w = 4 * items[k]!;
			const sx = walls[w + 2]! - walls[w]!;
			const sy = walls[w + 3]! - walls[w + 1]!;
			const share = ((x - walls[w]!) * sx + (y - walls[w + 1]!) * sy) / (sx * sx + sy * sy || 1);
			const at = share < 0 ? 0 : share > 1 ? 1 : share;
			const dx = x - walls[w]! - at * sx;
			const dy = y - walls[w + 1]! - at * sy;
			const d2 = dx * dx + dy * dy;
			if (d2 > 0.5 || d2 === 0) continue;
			const d = Math.sqrt(d2);
			const push = d < keep ? keep - d : WALL_STRENGTH * Math.exp((keep - d) / WALL_RANGE) * dt * dt * 0.5;
			x += (dx / d) * push;
			y += (dy / d) * push;
		}
		if (walls.length > 0 && grid.walls.isBlocked(x0, y0, x, y)) {
			x = x0;
			y = y0;
		}
		people.vx[i] = (x - x0) / dt;
		people.vy[i] = (y - y0) / dt;
		people.x[i] = x;
		people.y[i] = y;
	}
}
