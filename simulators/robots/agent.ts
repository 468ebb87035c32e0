/** A robot as the network meets it: drives, looks, keeps its own bad clock, and sends messages. */

import type { Answer, Command, Connection } from '../../src/lib/contracts/mqtt.ts';
import type { FloorWorld } from '../core/floor-world.ts';
import type { Random } from '../core/random.ts';
import type { Scenario } from '../scenarios.ts';
import { viewOf } from '../scenarios.ts';
import type { Link } from '../transport/link.ts';
import { peopleMessage, poseMessage, stateMessage, type PoseError } from './messages.ts';
import { rubbishFor } from './rubbish.ts';
import { Sensor } from './sensor.ts';
import type { Vehicle } from './vehicle.ts';

/** s after which a broker gives up on a client that went quiet: one and a half keep-alive times of 10 s. */
const BROKER_PATIENCE = 15;
/** s; state is repeated at least this often */
const STATE_EVERY = 4;
/** s; time in which the robot's own idea of its place wanders */
const ERROR_TIME = 20;

export class Agent {
	readonly sensor: Sensor;
	/** Whether messages get through at all. */
	radio = true;
	/** Whether the broker holds a connection. */
	connected = false;
	#error: { x: number; y: number; heading: number } = { x: 0, y: 0, heading: 0 };
	#nextPose = 0;
	#nextPeople = 0;
	#nextState = 0;
	#lastLook = 0;
	#lastState = '';
	#quietSince = -1;
	#restarting = false;
	readonly #random: Random;

	constructor(
		readonly vehicle: Vehicle,
		readonly link: Link,
		readonly scenario: Scenario,
		random: Random
	) {
		this.#random = random;
		this.sensor = new Sensor({ ...scenario.sensor, ...viewOf(vehicle.robot.model.letter) }, random.fork('sensor'));
		// Robots do not all speak in the same instant.
		this.#nextPose = random.between(0, 1 / scenario.poseHz);
		this.#nextPeople = random.between(0, 1 / scenario.peopleHz);
	}

	step(dt: number, time: number, floors: readonly FloorWorld[]): void {
		this.#wander(dt);
		this.#tendConnection(time);
		if (!this.radio) return;
		const floor = floors[this.vehicle.floor]!;
		if (time >= this.#nextPose) {
			this.#nextPose = Math.max(this.#nextPose + 1 / this.scenario.poseHz, time);
			this.#send(
				'pose',
				poseMessage(
					this.vehicle,
					this.#noisy(),
					this.link.clock.pace,
					this.link.stamp(time),
					this.link.nextSequence('pose')
				),
				time
			);
		}
		if (time >= this.#nextPeople) {
			this.#nextPeople = Math.max(this.#nextPeople + 1 / this.scenario.peopleHz, time);
			this.#look(floor, time);
		}
		this.#tellState(time);
		for (const answer of this.vehicle.errands.answers.splice(0)) this.#send('answer', answer satisfies Answer, time);
	}

	receive(command: Command, time: number): void {
		if (this.radio) this.vehicle.errands.obey(command, time, this.link.stamp(time));
	}

	/** Says goodbye, as a robot that is switched off by plan does. */
	goodbye(time: number): Connection {
		return { t: this.link.stamp(time), status: 'offline' };
	}

	lastWill(time: number): Connection {
		return { t: this.link.stamp(time), status: 'lost' };
	}

	#send(channel: 'pose' | 'people' | 'state' | 'answer' | 'connection', payload: unknown, time: number): void {
		const reliable = channel !== 'pose' && channel !== 'people';
		if (this.scenario.rubbish > 0 && this.#random.chance(this.scenario.rubbish) && !reliable) {
			const { channel: where, payload: what } = rubbishFor(this.#random, channel, payload);
			this.link.send(where, what, time, false);
		} else this.link.send(channel, payload, time, reliable);
	}

	#look(floor: FloorWorld, time: number): void {
		const { vehicle, sensor } = this;
		const seen = sensor.look(
			vehicle.x,
			vehicle.y,
			vehicle.heading,
			floor.people,
			floor.walking.grid,
			time,
			time - this.#lastLook
		);
		this.#lastLook = time;
		const { range, fieldOfView, velocityNoise } = sensor.settings;
		const view = { range, fieldOfView, velocities: velocityNoise !== null, pace: this.link.clock.pace };
		const message = peopleMessage(
			vehicle.frame,
			seen,
			this.#error,
			view,
			this.link.stamp(time),
			this.link.nextSequence('people')
		);
		this.#send('people', message, time);
	}

	#tellState(time: number): void {
		const { vehicle } = this;
		const said = `${vehicle.task?.id}/${vehicle.faultNow(time)}/${vehicle.isManual(time)}/${vehicle.paused}/${vehicle.phase}`;
		if (said === this.#lastState && time < this.#nextState) return;
		this.#lastState = said;
		this.#nextState = time + STATE_EVERY;
		this.#send('state', stateMessage(vehicle, time, this.link.stamp(time), this.link.nextSequence('state')), time);
	}

	/** Keeps up with radio holes and restarts; the broker speaks up when the robot has been quiet for long. */
	#tendConnection(time: number): void {
		const { vehicle } = this;
		const restarting = vehicle.faults.isActive('restart', time);
		if (this.#restarting && !restarting) {
			this.link.restart();
			this.sensor.restart();
		}
		this.#restarting = restarting;
		const covered = !restarting && !vehicle.faults.isActive('silence', time) && !this.#inHole();
		if (!covered) {
			if (this.radio) {
				this.#quietSince = time;
				this.link.cut();
			}
			this.radio = false;
			if (this.connected && time - this.#quietSince > BROKER_PATIENCE) {
				this.connected = false;
				this.link.sendWill(this.lastWill(this.#quietSince), time);
			}
			return;
		}
		this.radio = true;
		if (!this.connected) {
			this.connected = true;
			this.#lastState = '';
			this.#send('connection', { t: this.link.stamp(time), status: 'online' } satisfies Connection, time);
		}
	}

	#inHole(): boolean {
		const hole = this.scenario.radioHole;
		if (!hole || hole.floor !== this.vehicle.floor) return false;
		return Math.hypot(hole.x - this.vehicle.x, hole.y - this.vehicle.y) < hole.radius;
	}

	/** Ornstein–Uhlenbeck wander of the robot's idea of its own place (exact step). */
	#wander(dt: number): void {
		const keep = Math.exp(-dt / ERROR_TIME);
		const kick = this.scenario.poseError * Math.sqrt(1 - keep * keep);
		if (kick === 0) return;
		this.#error.x = keep * this.#error.x + this.#random.normal(0, kick);
		this.#error.y = keep * this.#error.y + this.#random.normal(0, kick);
		this.#error.heading = keep * this.#error.heading + this.#random.normal(0, 0.2 * kick);
	}

	#noisy(): PoseError {
		if (this.scenario.poseError === 0) return this.#error;
		const jitter = 0.008;
		return {
			x: this.#error.x + this.#random.normal(0, jitter),
			y: this.#error.y + this.#random.normal(0, jitter),
			heading: this.#error.heading + this.#random.normal(0, 0.004)
		};
	}
}
