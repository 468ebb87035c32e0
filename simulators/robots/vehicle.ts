/** One simulated robot as it drives: plans, moves, is held up, and fails. What it drives for is in its errands. */

import type { FloorWorld } from '../core/floor-world.ts';
import { MapFrame } from '../core/floor-world.ts';
import { distanceAt, nearestFree } from '../core/nav-grid.ts';
import type { Random } from '../core/random.ts';
import type { RobotBody } from '../crowd/walking.ts';
import type { FleetRobot } from '../venue/model.ts';
import { Errands, type DriveTask, type Phase } from './errands.ts';
import type { Faults } from './faults.ts';
import { lookAhead } from './route-following.ts';
import { COUNTED_ON, OBSTACLE_SIZE, planVelocity, wrap, type Plan } from './planner.ts';

const MAX_TURN = 1.6;
const ACCELERATION = 1;
const BRAKING = 1.8;
const PERSON_RADIUS = 0.22;
/** Share of the battery per s of driving. */
const DRAIN = 1 / (5 * 3600);

export class Vehicle implements RobotBody {
	x = 0;
	y = 0;
	heading = 0;
	speed = 0;
	vx = 0;
	vy = 0;
	wantX = 0;
	wantY = 0;
	battery: number;
	travelled = 0;
	/** What last kept it from moving. */
	cause = 'none';
	floor: number;
	frame: MapFrame;
	readonly errands: Errands;
	readonly radius: number;
	/** s since when its planner has found no way; −1 while there is one */
	blockedSince = -1;
	#ditherUntil = -1;
	#ditherTurn = 0;
	/** s; when nothing but a person or a robot at the bumper began to hold it, −1 while free */
	#pinnedSince = -1;
	#pinnedBy: 'people' | 'robots' = 'people';
	#backOffUntil = -1;
	#backOffHeading = 0;
	others: readonly Vehicle[] = [];
	#obstacles = new Float64Array(64 * OBSTACLE_SIZE);
	readonly #plan: Plan = { speed: 0, heading: 0, blockedBy: null };

	constructor(
		readonly robot: FleetRobot,
		readonly index: number,
		readonly floors: readonly FloorWorld[],
		readonly faults: Faults,
		readonly random: Random
	) {
		this.radius = robot.model.radius;
		this.floor = robot.floor;
		this.battery = random.between(0.35, 1);
		this.frame = this.#frameOn(robot.floor);
		this.errands = new Errands(this, random);
	}

	get task(): DriveTask | null {
		return this.errands.task;
	}

	get phase(): Phase {
		return this.errands.phase;
	}

	get paused(): boolean {
		return this.errands.paused;
	}

	/** s since when people, robots or walls have kept it from going on; −1 while it can go. */
	get heldSince(): number {
		return Math.max(this.blockedSince, this.#pinnedSince);
	}

	/** Puts the robot down somewhere; drops its task. */
	place(x: number, y: number, heading: number): void {
		Object.assign(this, { x, y, heading, speed: 0, vx: 0, vy: 0 });
		this.errands.drop();
	}

	/** Puts the robot down on a floor, for example out of the lift. */
	moveTo(floor: number, x: number, y: number, heading: number): void {
		this.floor = floor;
		this.frame = this.#frameOn(floor);
		this.place(x, y, heading);
	}

	/** m of the shortest true way left; null without a task. */
	remaining(): number | null {
		if (!this.task) return null;
		return distanceAt(this.floors[this.floor]!.driveGrid, this.task.field, this.x, this.y);
	}

	/** Error the robot itself reports, if any; it cannot drive with one. */
	faultNow(time: number): 'estop' | 'localization' | 'breakdown' | null {
		for (const name of ['estop', 'localization', 'breakdown'] as const)
			if (this.faults.isActive(name, time)) return name;
		return null;
	}

	isManual(time: number): boolean {
		return this.faults.isActive('manual', time);
	}

	/** Whether standing still now would be part of the plan. */
	standsByPlan(time: number): boolean {
		return this.paused || this.phase !== 'driving' || this.isManual(time);
	}

	step(dt: number, time: number, others: readonly Vehicle[], plansNow: boolean, liftWorks: boolean): void {
		this.others = others;
		this.errands.step(dt, time, liftWorks);
		const canDrive =
			this.phase === 'driving' &&
			this.task !== null &&
			!this.paused &&
			!this.isManual(time) &&
			this.faultNow(time) === null;
		let targetSpeed = 0;
		if (canDrive) {
			this.battery = Math.max(0.02, this.battery - DRAIN * dt);
			if (plansNow) this.#replan(time);
			targetSpeed = this.#plan.speed;
		} else {
			this.wantX = this.wantY = 0;
			this.#plan.speed = 0;
		}
		this.#drive(dt, time, targetSpeed, canDrive);
	}

	#frameOn(floor: number): MapFrame {
		const { maps } = this.floors[floor]!.model.floor;
		const name = this.robot.maps.find((candidate) => candidate in maps) ?? Object.keys(maps)[0]!;
		return new MapFrame(name, maps[name]!);
	}

	#replan(time: number): void {
		const task = this.task!;
		if (this.faults.isActive('obstruction', time)) {
			this.#plan.speed = 0;
			this.cause = 'obstruction';
			this.#stopWanting();
			this.#noteBlocked(time, true);
			return;
		}
		const target = lookAhead(task.route, this, this.floors[this.floor]!.driveGrid);
		const direction = Math.atan2(target.y - this.y, target.x - this.x);
		const { planner, model } = this.robot;
		planVelocity(
			{
				x: this.x,
				y: this.y,
				heading: this.heading,
				radius: this.radius,
				maxSpeed: model.maxSpeed,
				direction,
				planner,
				obstacles: this.#obstacles,
				count: this.#gatherObstacles(time),
				grid: this.floors[this.floor]!.driveGrid
			},
			this.#plan
		);
		const near = Math.hypot(task.goal.x - this.x, task.goal.y - this.y);
		this.#plan.speed = Math.min(this.#plan.speed, 0.15 + 0.8 * near);
		const blocked = this.#plan.blockedBy;
		if (blocked) this.cause = blocked;
		// A robot that counts on people keeps asking: it creeps on as long as nobody is right at its bumper.
		if (blocked === 'people' && planner === 'counting') {
			this.#plan.speed = 0.15;
			this.#plan.heading = direction;
		}
		if (blocked === 'walls') this.#leaveWall();
		if (blocked && planner === 'decoupled') this.#stopWanting();
		else {
			this.wantX = Math.cos(this.#plan.heading);
			this.wantY = Math.sin(this.#plan.heading);
		}
		this.#noteBlocked(time, blocked !== null);
		if (this.#ditherUntil > time) this.#dither(direction);
		else this.#makeWay(time, direction);
		if (this.#backOffUntil > time) {
			this.#plan.heading = this.#backOffHeading;
			this.#plan.speed = 0.4;
		}
	}

	/** Backs off and tries again: from one or two people after a while; of two robots the one later in the fleet does. */
	#makeWay(time: number, direction: number): void {
		const since = this.heldSince;
		if (since < 0 || time - since < 2 || time < this.#backOffUntil + 4) return;
		if (this.cause === 'people') {
			let near = 0;
			this.floors[this.floor]!.people.near(this.x, this.y, this.radius + 1.1, () => near++);
			if (near > 2 || time - since < 4) return;
		} else if (this.cause !== 'robots' && this.cause !== 'walls') return;
		const first =
			this.cause !== 'robots' ||
			this.others.some(
				(other) =>
					other.floor === this.floor && other.index < this.index && Math.hypot(other.x - this.x, other.y - this.y) < 2.5
			);
		const { driveGrid } = this.floors[this.floor]!;
		const back = direction + (this.random.chance(0.5) ? 2.3 : -2.3);
		this.#backOffHeading = back;
		if (first && driveGrid.isOpen(this.x, this.y, this.x + Math.cos(back), this.y + Math.sin(back)))
			this.#backOffUntil = time + 2.5;
	}

	#noteBlocked(time: number, blocked: boolean): void {
		if (!blocked) {
			if (this.blockedSince >= 0 && this.speed > 0.3) this.blockedSince = -1;
			return;
		}
		if (this.blockedSince < 0) this.blockedSince = time;
		const waited = time - this.blockedSince;
		if (
			this.robot.planner === 'decoupled' &&
			!this.errands.hold &&
			waited > 5 &&
			this.#ditherUntil < time - 20 &&
			this.random.chance(0.01)
		) {
			this.#ditherUntil = time + this.random.between(8, 18);
			this.#ditherTurn = this.random.chance(0.5) ? 1.5 : -1.5;
		}
	}

	/** Looks for a way where there is none: to one side, then to the other. */
	#dither(direction: number): void {
		if (this.random.chance(0.12)) this.#ditherTurn = -this.#ditherTurn;
		this.#plan.heading = direction + this.#ditherTurn;
		this.#plan.speed = 0.45 * this.robot.model.maxSpeed;
		this.cause = 'people';
	}

	/** Too close to a wall for its planner, it first goes back to open floor. */
	#leaveWall(): void {
		const free = nearestFree(this.floors[this.floor]!.driveGrid, this.x, this.y);
		if (!free || (free.x === this.x && free.y === this.y)) return;
		this.#plan.heading = Math.atan2(free.y - this.y, free.x - this.x);
		this.#plan.speed = 0.25;
	}

	/** At a corner its grid did not show: a short drive towards the most open side. */
	#turnFromWall(time: number): void {
		const { walls } = this.floors[this.floor]!.driveGrid;
		let most = 0;
		for (let k = 0; k < 12; k++) {
			const heading = (k * Math.PI) / 6;
			const gap = Math.min(1, walls.distance(this.x + 0.3 * Math.cos(heading), this.y + 0.3 * Math.sin(heading)));
			const score = gap - 0.05 * Math.abs(wrap(heading - this.#plan.heading));
			if (score <= most) continue;
			most = score;
			this.#backOffHeading = heading;
		}
		this.#backOffUntil = time + 1.2;
	}

	#stopWanting(): void {
		this.wantX = this.wantY = 0;
	}

	#gatherObstacles(time: number): number {
		const out = this.#obstacles;
		const people = this.floors[this.floor]!.people;
		let count = 0;
		const put = (
			dx: number,
			dy: number,
			vx: number,
			vy: number,
			radius: number,
			flexibility: number,
			person: number
		) => {
			if (count >= 64) return;
			out.set([dx, dy, vx, vy, radius, flexibility, person], count++ * OBSTACLE_SIZE);
		};
		for (const other of this.others) {
			if (other === this || other.floor !== this.floor) continue;
			const dx = other.x - this.x;
			const dy = other.y - this.y;
			if (dx * dx + dy * dy < 25) put(dx, dy, other.vx, other.vy, other.radius, 0.3, 0);
		}
		// Somebody who has not moved for 3 s at its bumper is not going to: plan round them.
		const pinned = this.#pinnedSince >= 0 && time - this.#pinnedSince > 3;
		const flexibility = this.robot.planner === 'counting' && !pinned ? COUNTED_ON : 0;
		people.near(this.x, this.y, 5, (slot) => {
			put(
				people.x[slot]! - this.x,
				people.y[slot]! - this.y,
				people.vx[slot]!,
				people.vy[slot]!,
				PERSON_RADIUS,
				flexibility,
				1
			);
		});
		return count;
	}

	#drive(dt: number, time: number, wanted: number, active: boolean): void {
		const turn = active ? wrap(this.#plan.heading - this.heading) : 0;
		// Stopped before people a robot keeps its heading; it turns on the spot only to set off.
		if (wanted > 0) this.heading = wrap(this.heading + Math.max(-MAX_TURN * dt, Math.min(MAX_TURN * dt, turn)));
		const facing = Math.abs(turn) < 0.7 ? Math.cos(turn) : 0;
		const most = wanted > 0 ? this.#protectedSpeed() : 0;
		if (wanted <= 0 || most > 0.05) this.#pinnedSince = -1;
		else {
			if (this.#pinnedSince < 0) this.#pinnedSince = time;
			this.cause = this.#pinnedBy;
		}
		const target = Math.min(wanted * facing, most);
		const change = target - this.speed;
		this.speed += Math.max(-BRAKING * dt, Math.min(ACCELERATION * dt, change));
		if (target <= 0 && this.speed < BRAKING * dt) this.speed = 0;
		const x = this.x + Math.cos(this.heading) * this.speed * dt;
		const y = this.y + Math.sin(this.heading) * this.speed * dt;
		const { walls } = this.floors[this.floor]!.driveGrid;
		const gap = walls.distance(x, y);
		if (this.speed > 0 && gap < this.radius && gap < walls.distance(this.x, this.y)) {
			this.speed = 0;
			this.#turnFromWall(time);
		}
		this.vx = Math.cos(this.heading) * this.speed;
		this.vy = Math.sin(this.heading) * this.speed;
		if (this.speed === 0) return;
		this.travelled += this.speed * dt;
		this.x = x;
		this.y = y;
	}

	/** m/s that leaves room to stop before anybody right ahead, whatever the plan says. */
	#protectedSpeed(): number {
		const people = this.floors[this.floor]!.people;
		const cos = Math.cos(this.heading);
		const sin = Math.sin(this.heading);
		let most = Infinity;
		people.near(this.x, this.y, this.radius + 1.2, (slot, distance) => {
			const ahead = ((people.x[slot]! - this.x) * cos + (people.y[slot]! - this.y) * sin) / (distance || 1);
			if (ahead < 0.4) return;
			const gap = distance - this.radius - people.radius[slot]! - 0.08;
			most = Math.min(most, stoppable(gap));
			this.#pinnedBy = 'people';
		});
		for (const other of this.others) {
			if (other === this || other.floor !== this.floor) continue;
			const dx = other.x - this.x;
			const dy = other.y - this.y;
			const distance = Math.hypot(dx, dy);
			if (distance > 2 || dx * cos + dy * sin < 0.6 * distance) continue;
			const gap = distance - this.radius - other.radius;
			if (gap < 0.05 && most > 0) [most, this.#pinnedBy] = [0, 'robots'];
		}
		return most;
	}
}

/** m/s from which a robot stops within a gap, with some to spare. */
const stoppable = (gap: number): number => (gap <= 0 ? 0 : Math.sqrt(2 * BRAKING * 0.8 * gap) * 0.7);
