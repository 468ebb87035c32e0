/** The way from a robot to the broker: its clock, and what the radio does to its messages. */

import type { Channel } from '../../src/lib/contracts/mqtt.ts';
import type { Random } from '../core/random.ts';

export interface LinkSettings {
	/** s, standard deviation of a robot's constant clock error */
	readonly clockOffset: number;
	/** Parts per million, standard deviation of the clock's drift */
	readonly clockDrift: number;
	/** s, least delay */
	readonly delay: number;
	/** s, mean of the exponential part of the delay */
	readonly jitter: number;
	/** Share of QoS 0 messages that never arrive */
	readonly loss: number;
	/** Share of messages that arrive twice */
	readonly duplicate: number;
	/** Share of messages held back so that a later one overtakes them */
	readonly reorder: number;
}

/** What a perfect clock shows. Shared by all robots, so that a run that fell behind can be moved on as a whole. */
export interface TrueClock {
	/** s since 1970 at simulation time 0 */
	epoch: number;
	/** Simulated seconds per second shown: 2 plays the venue like a film at double speed. */
	readonly pace: number;
}

export const CLEAN_LINK: LinkSettings = {
	clockOffset: 0,
	clockDrift: 0,
	delay: 0,
	jitter: 0,
	loss: 0,
	duplicate: 0,
	reorder: 0
};
/** An ordinary well-kept network with time service. */
export const MILD_LINK: LinkSettings = {
	clockOffset: 0.02,
	clockDrift: 3,
	delay: 0.01,
	jitter: 0.015,
	loss: 0.002,
	duplicate: 0.0005,
	reorder: 0.0005
};

/** One message on its way. */
export interface Delivery {
	readonly robot: string;
	readonly channel: Channel | 'unknown';
	/** A message of the contract, or text for rubbish that is no such message. */
	readonly payload: unknown;
	/** s since the start of the simulation */
	readonly sentAt: number;
	readonly arrivesAt: number;
	/** Sent by the broker on the robot's behalf (last will): a client must not publish it itself. */
	readonly byWill: boolean;
}

export class Link {
	/** s the robot's clock is ahead at the start */
	readonly offset: number;
	/** s per s */
	readonly drift: number;
	#sequence = new Map<Channel, number>();
	#queue: Delivery[] = [];
	#lastReliable = 0;
	readonly #random: Random;

	constructor(
		readonly robot: string,
		readonly settings: LinkSettings,
		readonly clock: TrueClock,
		random: Random
	) {
		this.#random = random;
		this.offset = random.normal(0, settings.clockOffset);
		this.drift = random.normal(0, settings.clockDrift) * 1e-6;
	}

	/** The robot's clock, ms since the epoch. */
	stamp(time: number): number {
		const { epoch, pace } = this.clock;
		return Math.round((epoch + (time / pace) * (1 + this.drift) + this.offset) * 1000);
	}

	/** Next sequence number of a channel. */
	nextSequence(channel: Channel): number {
		const seq = this.#sequence.get(channel) ?? 0;
		this.#sequence.set(channel, seq + 1);
		return seq;
	}

	/** Numbers start at zero again, as after a restart of the robot's software. */
	restart(): void {
		this.#sequence = new Map();
	}

	/** Hands a message to the radio. Messages of QoS 1 are neither lost nor reordered. */
	send(channel: Channel | 'unknown', payload: unknown, time: number, reliable: boolean): void {
		const { delay, jitter, loss, duplicate, reorder } = this.settings;
		const random = this.#random;
		if (!reliable && loss > 0 && random.chance(loss)) return;
		let arrivesAt = time + delay + (jitter > 0 ? random.exponential(jitter) : 0);
		if (reliable) arrivesAt = this.#lastReliable = Math.max(arrivesAt, this.#lastReliable);
		else if (reorder > 0 && random.chance(reorder)) arrivesAt += 0.4;
		const delivery = { robot: this.robot, channel, payload, sentAt: time, arrivesAt, byWill: false };
		this.#queue.push(delivery);
		if (duplicate > 0 && random.chance(duplicate)) this.#queue.push({ ...delivery, arrivesAt: arrivesAt + 0.05 });
	}

	/** The broker's word that the robot is gone. */
	sendWill(payload: unknown, time: number): void {
		this.#queue.push({
			robot: this.robot,
			channel: 'connection',
			payload,
			sentAt: time,
			arrivesAt: time,
			byWill: true
		});
	}

	/** Appends everything that has arrived by `time`; what is still on its way stays. */
	collect(time: number, into: Delivery[]): void {
		if (this.#queue.length === 0) return;
		const waiting: Delivery[] = [];
		for (const delivery of this.#queue) (delivery.arrivesAt <= time ? into : waiting).push(delivery);
		this.#queue = waiting;
	}

	/** Drops what is still on its way: the radio is gone. */
	cut(): void {
		this.#queue = [];
	}
}
