/**
 * The simulated venue: people, robots and what the robots send, one `step` at a time and without a network.
 * The same seed gives the same run, message for message.
 */

import type { Command } from '../src/lib/contracts/mqtt.ts';
import { FloorWorld } from './core/floor-world.ts';
import { isInsideRing } from './core/nav-grid.ts';
import { createRandom, type Random } from './core/random.ts';
import { phaseAt } from './crowd/timetable.ts';
import { Agent } from './robots/agent.ts';
import { Faults } from './robots/faults.ts';
import { TruthKeeper } from './robots/truth-keeper.ts';
import { Vehicle } from './robots/vehicle.ts';
import type { Scenario } from './scenarios.ts';
import { StuckScript } from './stuck.ts';
import { Link, type Delivery, type TrueClock } from './transport/link.ts';
import type { FleetRobot, VenueModel } from './venue/model.ts';

export interface WorldOptions {
	readonly venue: VenueModel;
	readonly fleet: readonly FleetRobot[];
	readonly scenario: Scenario;
	readonly seed: number;
	/** s since 1970 at simulation time 0: what a perfect clock would show. */
	readonly epoch: number;
	/** Simulated seconds per second on the robots' clocks; speeds in messages grow with it. 1 unless a film is wanted. */
	readonly pace?: number;
}

/** s between two looks of a robot's planner. */
const PLAN_EVERY = 0.2;

export class World {
	/** s since the start */
	time = 0;
	readonly floors: readonly FloorWorld[];
	readonly agents: readonly Agent[];
	readonly truth: TruthKeeper;
	readonly scenario: Scenario;
	readonly clock: TrueClock;
	readonly #vehicles: readonly Vehicle[];
	readonly #byFloor: Vehicle[][];
	readonly #byKey: Map<string, Agent>;
	readonly #script: StuckScript | null;
	readonly #random: Random;
	#steps = 0;
	#firstOnlookers: number | null;

	constructor({ venue, fleet, scenario, seed, epoch, pace = 1 }: WorldOptions) {
		const random = createRandom(seed);
		this.#random = random.fork('world');
		this.scenario = scenario;
		this.clock = { epoch, pace };
		this.floors = venue.floors.map(
			(model, i) =>
				new FloorWorld(model, random.fork(model.floor.key), {
					yielding: scenario.yielding,
					children: scenario.children,
					curiosity: scenario.curiosity,
					peak: scenario.peak[i] ?? 0
				})
		);
		const now = phaseAt(scenario.timetable, 0);
		for (const floor of this.floors) floor.life.populate(now);
		this.agents = fleet.map((robot, i) => {
			const own = random.fork(robot.key);
			const vehicle = new Vehicle(
				robot,
				i,
				this.floors,
				new Faults(scenario.faults, own.fork('faults')),
				own.fork('drive')
			);
			const link = new Link(robot.key, scenario.link, this.clock, own.fork('link'));
			return new Agent(vehicle, link, scenario, own.fork('agent'));
		});
		this.#vehicles = this.agents.map(({ vehicle }) => vehicle);
		this.#byFloor = this.floors.map(() => []);
		this.#byKey = new Map(this.agents.map((agent) => [agent.vehicle.robot.key, agent]));
		this.truth = new TruthKeeper(this.agents, this.floors);
		this.#firstOnlookers = scenario.firstOnlookersAt;
		this.#spread();
		this.#script = scenario.stuck ? new StuckScript(this.#vehicles[0]!, this.floors[this.#vehicles[0]!.floor]!) : null;
	}

	/**
	 * Moves the world on and returns what reached the broker meanwhile, in order of arrival.
	 * @param dt s, 0.05…0.2
	 */
	step(dt: number): Delivery[] {
		this.time += dt;
		const { time } = this;
		const every = Math.max(1, Math.round(PLAN_EVERY / dt));
		this.#steps++;
		for (const list of this.#byFloor) list.length = 0;
		for (const vehicle of this.#vehicles) this.#byFloor[vehicle.floor]!.push(vehicle);
		const now = phaseAt(this.scenario.timetable, time);
		const out = this.scenario.liftOut;
		const liftWorks = !out || time < out[0] || time >= out[1];
		for (let f = 0; f < this.floors.length; f++) {
			if (!liftWorks) this.floors[f]!.life.hold('lift', time + 1);
			this.floors[f]!.step(dt, time, now, this.#byFloor[f]!);
		}
		this.#script?.step(time);
		this.#startFaults(dt);
		for (const vehicle of this.#vehicles) {
			vehicle.step(dt, time, this.#vehicles, (this.#steps + vehicle.index) % every === 0, liftWorks);
		}
		const arrived: Delivery[] = [];
		for (const agent of this.agents) {
			agent.step(dt, time, this.floors);
			agent.link.collect(time, arrived);
		}
		this.truth.step(time);
		return arrived.sort((a, b) => a.arrivesAt - b.arrivesAt);
	}

	/** Hands a command to a robot, as its subscription would. Unknown robots are ignored. */
	command(robot: string, command: Command): void {
		this.#byKey.get(robot)?.receive(command, this.time);
	}

	agent(robot: string): Agent | undefined {
		return this.#byKey.get(robot);
	}

	/** Half of the fleet starts at its dock, the others somewhere on the floor with an errand soon to come. */
	#spread(): void {
		for (const vehicle of this.#vehicles) {
			const { docks, goals } = this.floors[vehicle.floor]!.model;
			const dock = docks[vehicle.index % docks.length];
			const spot = vehicle.index % 2 && goals.length ? this.#freeGoal(vehicle) : (dock ?? goals[0] ?? { x: 0, y: 0 });
			vehicle.place(spot.x, spot.y, -Math.PI / 2);
			vehicle.errands.until = this.#random.between(0.5, 12);
		}
	}

	#freeGoal(vehicle: Vehicle) {
		const { goals } = this.floors[vehicle.floor]!.model;
		for (let tries = 0; tries < 30; tries++) {
			const goal = this.#random.pick(goals);
			const taken = this.#vehicles.some((o) => o.floor === vehicle.floor && Math.hypot(o.x - goal.x, o.y - goal.y) < 2);
			if (!taken) return goal;
		}
		return vehicle.errands.home;
	}

	#startFaults(dt: number): void {
		const { time } = this;
		if (this.#firstOnlookers !== null && this.truth.halts.some(({ onset, end }) => (end ?? time) - onset >= 8))
			this.#firstOnlookers = null;
		for (const vehicle of this.#vehicles) {
			if (vehicle.phase !== 'driving' || vehicle.paused) continue;
			const fault = vehicle.faults.draw(dt, time);
			if (fault?.name === 'onlookers') this.#gather(vehicle, fault.seconds);
			if (this.#firstOnlookers === null || time < this.#firstOnlookers || vehicle.errands.legTime(time) < 3) continue;
			if (vehicle.robot.planner !== 'decoupled' || !this.#gather(vehicle, 60)) continue;
			// The ring may not close in time; then other people try another robot, until something has stood for a while.
			this.#firstOnlookers = time + 20;
		}
	}

	/** True when enough people were near to close the ring. */
	#gather(vehicle: Vehicle, seconds: number): boolean {
		const { life, people, model } = this.floors[vehicle.floor]!;
		let near = 0;
		people.near(vehicle.x, vehicle.y, 7, () => near++);
		const private_ = model.floor.zones.find((z) => z.private && isInsideRing(z.polygon.outer, vehicle.x, vehicle.y));
		if (near < 5 || private_) return false;
		const index = this.#byFloor[vehicle.floor]!.indexOf(vehicle);
		return life.gather(index, vehicle, vehicle.radius > 0.4 ? 9 : 7, seconds, 9) >= 5;
	}
}
