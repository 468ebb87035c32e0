/** What a robot is about: its task, waits at doors and lifts, charging, and what its operator asks of it. */

import type { Answer, Command } from '../../src/lib/contracts/mqtt.ts';
import type { Point } from '../../src/lib/domain/geometry/types.ts';
import { findRoute, type DistanceField } from '../core/nav-grid.ts';
import type { Random } from '../core/random.ts';
import type { RobotGoal } from '../venue/model.ts';
import { passes } from './route-following.ts';
import type { Vehicle } from './vehicle.ts';

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

/** s a robot stands in front of people before it gives the task up */
const PATIENCE = 100;
/** Share of the battery per s of charging. */
const CHARGE = 1 / 1800;

export class Errands {
	phase: Phase = 'idle';
	task: DriveTask | null = null;
	/** s; when the present phase ends, where it ends by the clock */
	until = 0;
	paused = false;
	/** Scripted scenarios take the choice of goals over. */
	hold = false;
	readonly answers: Answer[] = [];
	#taskNumber = 0;
	#legStart = 0;
	#holdCommand: Command | null = null;
	readonly #vehicle: Vehicle;
	readonly #random: Random;

	constructor(vehicle: Vehicle, random: Random) {
		this.#vehicle = vehicle;
		this.#random = random;
	}

	/** Forgets the task at hand. */
	drop(): void {
		this.task = null;
		this.phase = 'idle';
	}

	/** Its own dock. */
	get home(): RobotGoal {
		const { docks } = this.#vehicle.floors[this.#vehicle.robot.floor]!.model;
		return docks[this.#vehicle.index % docks.length]!;
	}

	/** Sets out for a place, by lift when it is on another floor. False when there is no way. */
	assign(goal: RobotGoal, floor: number, time: number): boolean {
		const here = this.#vehicle.floors[this.#vehicle.floor]!;
		const ride = floor !== this.#vehicle.floor;
		const target = ride ? here.model.lift : goal;
		if (!target) return false;
		const field = here.fieldTo(target);
		const route = findRoute(here.driveGrid, field, this.#vehicle, target);
		if (!route) return false;
		this.#taskNumber++;
		this.#legStart = time;
		this.#vehicle.blockedSince = -1;
		this.phase = 'driving';
		this.task = {
			id: `${this.#vehicle.robot.key}-${this.#taskNumber}`,
			goal: { x: target.x, y: target.y },
			goalKey: goal.key,
			route,
			field,
			rideTo: ride ? floor : null,
			doors: here.model.doors.filter((door) => passes(route, door))
		};
		return true;
	}

	/** Ends what ends by the clock, notices arrival, and finds the next thing to do. */
	step(dt: number, time: number, liftWorks: boolean): void {
		const { task } = this;
		if (this.phase === 'charging') {
			this.#vehicle.battery = Math.min(1, this.#vehicle.battery + CHARGE * dt);
			if (this.#vehicle.battery > 0.85) this.#rest(time, 0);
		} else if (this.phase === 'idle' && time >= this.until && !this.hold && !this.paused) this.#nextTask(time);
		else if (this.phase === 'waiting' && time >= this.until && task) {
			if (task.rideTo === null) this.phase = 'driving';
			else if (liftWorks && this.#isFreeOn(task.rideTo)) this.#ride(task.rideTo, time);
		} else if (this.phase === 'arrived' && time >= this.until) this.#finish(time);
		else if (this.phase === 'driving' && task) this.#checkArrival(task, time);
	}

	#checkArrival(task: DriveTask, time: number): void {
		const away = Math.hypot(task.goal.x - this.#vehicle.x, task.goal.y - this.#vehicle.y);
		const held = this.#vehicle.heldSince;
		const longWait = held >= 0 && time - held > 1;
		if (away < 0.4 || (away < 1.9 && longWait)) {
			this.phase = task.rideTo === null ? 'arrived' : 'waiting';
			this.until = time + (task.rideTo === null ? this.#random.between(3, 15) : this.#random.between(10, 25));
			// Served from where it stands: it says so, or it would seem to be held up short of its goal.
			if (task.rideTo === null) this.task = { ...task, goal: { x: this.#vehicle.x, y: this.#vehicle.y } };
			return;
		}
		const door = task.doors.find(({ x, y }) => Math.hypot(x - this.#vehicle.x, y - this.#vehicle.y) < 1.3);
		if (door) {
			task.doors.splice(task.doors.indexOf(door), 1);
			this.phase = 'waiting';
			this.until = time + this.#random.between(2, 5);
		} else if (!this.hold && this.#vehicle.blockedSince >= 0 && time - this.#vehicle.blockedSince > PATIENCE)
			this.#rest(time, 15);
	}

	#finish(time: number): void {
		const atHome = this.task?.goalKey === this.home.key;
		if (this.#holdCommand) {
			this.answers.push({ id: this.#holdCommand.id, status: 'done' });
			this.#holdCommand = null;
			this.paused = true;
		}
		if (atHome && this.#vehicle.battery < 0.8) {
			this.task = null;
			this.phase = 'charging';
		} else this.#rest(time, atHome ? 180 : 60);
	}

	#rest(time: number, most: number): void {
		this.task = null;
		this.phase = 'idle';
		this.until = time + this.#random.between(0, most);
		this.#vehicle.blockedSince = -1;
	}

	#nextTask(time: number): void {
		const random = this.#random;
		const here = this.#vehicle.floors[this.#vehicle.floor]!.model;
		const low = this.#vehicle.battery < 0.25;
		if (low || (this.task === null && random.chance(0.04))) {
			if (this.assign(this.home, this.#vehicle.robot.floor, time)) return;
		}
		const rides =
			this.#vehicle.robot.model.letter === 'P' && this.#vehicle.floors.length > 1 && here.lift && random.chance(0.12);
		const floor = rides ? (this.#vehicle.floor + 1) % this.#vehicle.floors.length : this.#vehicle.floor;
		const goals = this.#vehicle.floors[floor]!.model.goals;
		for (let tries = 0; tries < 12; tries++) {
			const goal = random.pick(goals);
			if (floor === this.#vehicle.floor && Math.hypot(goal.x - this.#vehicle.x, goal.y - this.#vehicle.y) < 5) continue;
			// The dispatcher sends no two robots to one place.
			if (this.#vehicle.others.some((other) => other !== this.#vehicle && other.task?.goalKey === goal.key)) continue;
			if (this.assign(goal, floor, time)) return;
		}
		this.until = time + 5;
	}

	/** Nobody rides into a robot that still stands before the lift on the other floor. */
	#isFreeOn(floor: number): boolean {
		const lift = this.#vehicle.floors[floor]!.model.lift!;
		return this.#vehicle.others.every(
			(other) => other.floor !== floor || Math.hypot(other.x - lift.x, other.y - lift.y) > 1.4
		);
	}

	/** Out of the lift on the other floor, on with the same errand. */
	#ride(floor: number, time: number): void {
		const task = this.task!;
		const lift = this.#vehicle.floors[floor]!.model.lift!;
		this.#vehicle.moveTo(floor, lift.x, lift.y, -Math.PI / 2);
		const goal = [...this.#vehicle.floors[floor]!.model.goals, ...this.#vehicle.floors[floor]!.model.docks].find(
			({ key }) => key === task.goalKey
		);
		if (!goal || !this.assign(goal, floor, time)) this.#rest(time, 5);
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
			const spot = this.#vehicle.frame.toFloorPoint(x, y);
			const goal = command.kind === 'return' ? this.home : { key: 'held-place', x: spot.x, y: spot.y };
			const floor = command.kind === 'return' ? this.#vehicle.robot.floor : this.#vehicle.floor;
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
