/** One simulated robot: tasks, driving, faults and what its operator asks of it. */

import type { Point } from '../../src/lib/domain/geometry/types.ts';
import type { Answer, Command } from '../../src/lib/contracts/mqtt.ts';
import type { FloorWorld } from '../core/floor-world.ts';
import { MapFrame } from '../core/floor-world.ts';
import { distanceAt, findRoute, type DistanceField } from '../core/nav-grid.ts';
import type { Random } from '../core/random.ts';
import type { RobotBody } from '../crowd/walking.ts';
import type { FleetRobot, RobotGoal } from '../venue/model.ts';
import type { Faults } from './faults.ts';
import { COUNTED_ON, OBSTACLE_SIZE, planVelocity, wrap, type Plan } from './planner.ts';

export interface DriveTask {
	readonly id: string;
	readonly goal: Point;
	readonly goalKey: string;
	readonly route: readonly Point[];
	readonly field: DistanceField;
	/** Reached floor's index when this leg ends at the lift; null otherwise */
	readonly rideTo: number | null;
	/** Doors still to be waited at */
	readonly doors: RobotGoal[];
}

export type Phase = 'idle' | 'driving' | 'waiting' | 'arrived' | 'charging';

const MAX_TURN = 1.6;
const ACCELERATION = 1;
const BRAKING = 1.8;
const LOOK_AHEAD = 1.6;
/** s a robot stands in front of people before it gives the task up */
const PATIENCE = 100;
const PERSON_RADIUS = 0.22;
/** Share of the battery per s of driving and of charging. */
const DRAIN = 1 / (5 * 3600);
const CHARGE = 1 / 1800;

export class Vehicle implements RobotBody {
	x = 0;
	y = 0;
	heading = 0;
	speed = 0;
	vx = 0;
	vy = 0;
	wantX = 0;
	wantY = 0;
	phase: Phase = 'idle';
	task: DriveTask | null = null;
	/** s; when the present phase ends, where it ends by the clock */
	until = 0;
	paused = false;
	battery: number;
	travelled = 0;
	/** What last kept it from moving. */
	cause = 'none';
	floor: number;
	frame: MapFrame;
	/** Scripted scenarios take the choice of goals over. */
	holdTasks = false;
	readonly radius: number;
	readonly answers: Answer[] = [];
	#blockedSince = -1;
	#ditherUntil = -1;
	#ditherTurn = 0;
	/** s; when nothing but a person or a robot at the bumper began to hold it, −1 while free */
	#pinnedSince = -1;
	#pinnedBy: 'people' | 'robots' = 'people';
	#backOffUntil = -1;
	#backOffHeading = 0;
	#others: readonly Vehicle[] = [];
	#taskNumber = 0;
	#legStart = 0;
	#holdCommand: Command | null = null;
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
	}

	get home(): RobotGoal {
		const { docks } = this.floors[this.robot.floor]!.model;
		return docks[this.index % docks.length]!;
	}

	/** Puts the robot down somewhere; drops its task. */
	place(x: number, y: number, heading: number): void {
		Object.assign(this, { x, y, heading, speed: 0, vx: 0, vy: 0, task: null, phase: 'idle' });
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

	assign(goal: RobotGoal, floor: number, time: number): boolean {
		const here = this.floors[this.floor]!;
		const ride = floor !== this.floor;
		const target = ride ? here.model.lift : goal;
		if (!target) return false;
		const field = here.fieldTo(target);
		const route = findRoute(here.driveGrid, field, this, target);
		if (!route) return false;
		this.#taskNumber++;
		this.#legStart = time;
		this.#blockedSince = -1;
		this.phase = 'driving';
		this.task = {
			id: `${this.robot.key}-${this.#taskNumber}`,
			goal: { x: target.x, y: target.y },
			goalKey: goal.key,
			route,
			field,
			rideTo: ride ? floor : null,
			doors: here.model.doors.filter((door) => passes(route, door))
		};
		return true;
	}

	step(dt: number, time: number, others: readonly Vehicle[], plansNow: boolean, liftWorks: boolean): void {
		this.#others = others;
		this.#runPhase(dt, time, liftWorks);
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

	#runPhase(dt: number, time: number, liftWorks: boolean): void {
		const { task } = this;
		if (this.phase === 'charging') {
			this.battery = Math.min(1, this.battery + CHARGE * dt);
			if (this.battery > 0.85) this.#rest(time, 0);
		} else if (this.phase === 'idle' && time >= this.until && !this.holdTasks && !this.paused) this.#nextTask(time);
		else if (this.phase === 'waiting' && time >= this.until && task) {
			if (task.rideTo === null) this.phase = 'driving';
			else if (liftWorks) this.#ride(task.rideTo, time);
		} else if (this.phase === 'arrived' && time >= this.until) this.#finish(time);
		else if (this.phase === 'driving' && task) this.#checkArrival(task, time);
	}

	#checkArrival(task: DriveTask, time: number): void {
		const away = Math.hypot(task.goal.x - this.x, task.goal.y - this.y);
		const held = Math.max(this.#blockedSince, this.#pinnedSince);
		const longWait = held >= 0 && time - held > 1;
		if (away < 0.4 || (away < 1.9 && longWait)) {
			this.phase = task.rideTo === null ? 'arrived' : 'waiting';
			this.until = time + (task.rideTo === null ? this.random.between(3, 15) : this.random.between(10, 25));
			return;
		}
		const door = task.doors.find(({ x, y }) => Math.hypot(x - this.x, y - this.y) < 1.3);
		if (door) {
			task.doors.splice(task.doors.indexOf(door), 1);
			this.phase = 'waiting';
			this.until = time + this.random.between(2, 5);
		} else if (!this.holdTasks && this.#blockedSince >= 0 && time - this.#blockedSince > PATIENCE) this.#rest(time, 15);
	}

	#finish(time: number): void {
		const atHome = this.task?.goalKey === this.home.key;
		if (this.#holdCommand) {
			this.answers.push({ id: this.#holdCommand.id, status: 'done' });
			this.#holdCommand = null;
			this.paused = true;
		}
		if (atHome && this.battery < 0.8) {
			this.task = null;
			this.phase = 'charging';
		} else this.#rest(time, atHome ? 60 : 12);
	}

	#rest(time: number, most: number): void {
		this.task = null;
		this.phase = 'idle';
		this.until = time + this.random.between(0, most);
		this.#blockedSince = -1;
	}

	#nextTask(time: number): void {
		const { random } = this;
		const here = this.floors[this.floor]!.model;
		const low = this.battery < 0.25;
		if (low || (this.task === null && random.chance(0.04))) {
			if (this.assign(this.home, this.robot.floor, time)) return;
		}
		const rides = this.robot.model.letter === 'P' && this.floors.length > 1 && here.lift && random.chance(0.12);
		const floor = rides ? (this.floor + 1) % this.floors.length : this.floor;
		const goals = this.floors[floor]!.model.goals;
		for (let tries = 0; tries < 12; tries++) {
			const goal = random.pick(goals);
			if (floor === this.floor && Math.hypot(goal.x - this.x, goal.y - this.y) < 5) continue;
			// The dispatcher sends no two robots to one place.
			if (this.#others.some((other) => other !== this && other.task?.goalKey === goal.key)) continue;
			if (this.assign(goal, floor, time)) return;
		}
		this.until = time + 5;
	}

	/** Out of the lift on the other floor, on with the same errand. */
	#ride(floor: number, time: number): void {
		const task = this.task!;
		const lift = this.floors[floor]!.model.lift!;
		this.floor = floor;
		this.frame = this.#frameOn(floor);
		this.place(lift.x, lift.y, -Math.PI / 2);
		const goal = [...this.floors[floor]!.model.goals, ...this.floors[floor]!.model.docks].find(
			({ key }) => key === task.goalKey
		);
		if (!goal || !this.assign(goal, floor, time)) this.#rest(time, 5);
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
		const since = Math.max(this.#blockedSince, this.#pinnedSince);
		if (since < 0 || time - since < 2 || time < this.#backOffUntil + 4) return;
		if (this.cause === 'people') {
			let near = 0;
			this.floors[this.floor]!.people.near(this.x, this.y, this.radius + 1.1, () => near++);
			if (near > 2 || time - since < 4) return;
		} else if (this.cause !== 'robots') return;
		const first =
			this.cause === 'people' ||
			this.#others.some(
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
			if (this.#blockedSince >= 0 && this.speed > 0.3) this.#blockedSince = -1;
			return;
		}
		if (this.#blockedSince < 0) this.#blockedSince = time;
		const waited = time - this.#blockedSince;
		if (
			this.robot.planner === 'decoupled' &&
			!this.holdTasks &&
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
		for (const other of this.#others) {
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
		if (this.speed > 0 && gap < this.radius && gap < walls.distance(this.x, this.y)) this.speed = 0;
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
		for (const other of this.#others) {
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

	/** Answers a command the way a well-behaved robot does. */
	obey(command: Command, time: number, now: number): void {
		if (command.expires_at < now) {
			this.answers.push({ id: command.id, status: 'refused', text: 'The command had expired.' });
			return;
		}
		this.answers.push({ id: command.id, status: 'seen' });
		if (this.#holdCommand) {
			this.answers.push({ id: this.#holdCommand.id, status: 'failed', text: 'Another command came first.' });
			this.#holdCommand = null;
		}
		if (command.kind === 'pause') this.paused = true;
		else if (command.kind === 'resume') this.paused = false;
		else {
			const x = Number(command.args?.x);
			const y = Number(command.args?.y);
			const spot = this.frame.toFloorPoint(x, y);
			const goal = command.kind === 'return' ? this.home : { key: 'held-place', x: spot.x, y: spot.y };
			const floor = command.kind === 'return' ? this.robot.floor : this.floor;
			if (!Number.isFinite(goal.x + goal.y) || !this.assign(goal, floor, time)) {
				this.answers.push({ id: command.id, status: 'refused', text: 'There is no way to that place.' });
				return;
			}
			this.paused = false;
			if (command.kind === 'hold_at') {
				this.#holdCommand = command;
				this.answers.push({ id: command.id, status: 'running' });
				return;
			}
		}
		this.answers.push({ id: command.id, status: 'done' });
	}

	/** s the present leg has taken. */
	legTime(time: number): number {
		return time - this.#legStart;
	}
}

/** m/s from which a robot stops within a gap, with some to spare. */
const stoppable = (gap: number): number => (gap <= 0 ? 0 : Math.sqrt(2 * BRAKING * 0.8 * gap) * 0.7);

/** A point of the route about LOOK_AHEAD metres on; falls back along the route to one in plain view. */
function lookAhead(route: readonly Point[], at: Point, grid: FloorWorld['driveGrid']): Point {
	let best = 0;
	let bestShare = 0;
	let least = Infinity;
	for (let i = 0; i + 1 < route.length; i++) {
		const a = route[i]!;
		const b = route[i + 1]!;
		const dx = b.x - a.x;
		const dy = b.y - a.y;
		const length2 = dx * dx + dy * dy;
		const share = length2 > 0 ? Math.max(0, Math.min(1, ((at.x - a.x) * dx + (at.y - a.y) * dy) / length2)) : 0;
		const away = Math.hypot(a.x + share * dx - at.x, a.y + share * dy - at.y);
		if (away < least) [least, best, bestShare] = [away, i, share];
	}
	let left = LOOK_AHEAD;
	let share = bestShare;
	let target: Point = route[route.length - 1]!;
	for (let i = best; i + 1 < route.length; i++) {
		const a = route[i]!;
		const b = route[i + 1]!;
		const length = Math.hypot(b.x - a.x, b.y - a.y);
		if ((1 - share) * length >= left) {
			const s = share + left / length;
			target = { x: a.x + s * (b.x - a.x), y: a.y + s * (b.y - a.y) };
			break;
		}
		left -= (1 - share) * length;
		share = 0;
	}
	if (grid.walls.isBlocked(at.x, at.y, target.x, target.y)) {
		const a = route[best]!;
		const b = route[Math.min(best + 1, route.length - 1)]!;
		return least > 0.5 ? { x: a.x + bestShare * (b.x - a.x), y: a.y + bestShare * (b.y - a.y) } : b;
	}
	return target;
}

const passes = (route: readonly Point[], door: Point): boolean =>
	route.some((a, i) => {
		const b = route[i + 1];
		if (!b) return false;
		const dx = b.x - a.x;
		const dy = b.y - a.y;
		const share = Math.max(0, Math.min(1, ((door.x - a.x) * dx + (door.y - a.y) * dy) / (dx * dx + dy * dy || 1)));
		return Math.hypot(a.x + share * dx - door.x, a.y + share * dy - door.y) < 1.3;
	});
