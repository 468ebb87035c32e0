/** Plays recordings through MQTT at their own pace. */

import mqtt, { type MqttClient } from 'mqtt';
import { CHANNELS, robotTopic, type Connection } from '../../src/lib/contracts/mqtt.ts';
import type { Passwords } from '../provision.ts';
import { RECORDINGS } from './floor.ts';
import { timelineOf, type Observer, type Timed } from './observers.ts';
import type { Recording } from './parse.ts';

export interface PlayOptions {
	readonly recording: Recording;
	readonly observers: readonly Observer[];
	readonly url: string;
	readonly passwords: Readonly<Passwords>;
	/** Recorded seconds per second; stamps keep to the wall clock. */
	readonly speed: number;
	readonly loop: boolean;
	/** Ends the replay early. */
	readonly signal: AbortSignal;
	readonly onTrouble?: (message: string) => void;
}

export interface Played {
	readonly messages: number;
	/** People messages sent by each observer: one per recorded instant and round */
	readonly looks: number;
}

/** Connects every observer, plays to the end (or for ever with `loop`), says goodbye and resolves. */
export async function playRecording(options: PlayOptions): Promise<Played> {
	const { recording, observers, url, passwords, speed, loop, signal, onTrouble = () => {} } = options;
	const players = await Promise.all(
		observers.map((observer) => connect(observer, recording, url, passwords, onTrouble, signal))
	);
	let [messages, looks] = [0, 0];
	do {
		const startMs = Date.now();
		const queue = players
			.flatMap(({ timeline }, player) => timeline.map((timed) => ({ timed, player })))
			.sort((a, b) => a.timed.at - b.timed.at);
		for (const { timed, player } of queue) {
			const due = startMs + (timed.at * 1000) / speed;
			await until(due, signal);
			if (signal.aborted) break;
			players[player]!.send(timed, due, speed);
			messages++;
			if (timed.channel === 'people' && player === 0) looks++;
		}
	} while (loop && !signal.aborted);
	await Promise.all(players.map(({ leave }) => leave()));
	return { messages, looks };
}

interface Player {
	readonly timeline: readonly Timed[];
	send(timed: Timed, stampMs: number, speed: number): void;
	leave(): Promise<void>;
}

async function connect(
	observer: Observer,
	recording: Recording,
	url: string,
	passwords: Readonly<Passwords>,
	onTrouble: (message: string) => void,
	signal: AbortSignal
): Promise<Player> {
	const { key } = observer.robot;
	const username = `${RECORDINGS.key}/${key}`;
	const connection = robotTopic(RECORDINGS.key, key, 'connection');
	const word = (status: Connection['status']) => JSON.stringify({ t: Date.now(), status } satisfies Connection);
	const client: MqttClient = mqtt.connect(url, {
		protocolVersion: 4,
		clientId: username,
		username,
		password: passwords[key] ?? '',
		clean: true,
		keepalive: 10,
		reconnectPeriod: 2000,
		queueQoSZero: false,
		will: { topic: connection, payload: Buffer.from(word('lost')), qos: 1, retain: true }
	});
	let told = false;
	client.on('error', (error) => {
		if (!told) onTrouble(`${key} cannot sign in to the broker: ${error.message || 'no connection'}.`);
		told = true;
	});
	await new Promise<void>((resolve) => {
		client.once('connect', () => resolve());
		signal.addEventListener('abort', () => resolve(), { once: true });
	});
	if (client.connected) await client.publishAsync(connection, word('online'), { qos: 1, retain: true });
	const sequence = new Map<string, number>();
	return {
		timeline: timelineOf(recording, observer),
		send({ channel, message }, stampMs, speed) {
			const seq = sequence.get(channel) ?? 0;
			sequence.set(channel, seq + 1);
			const { qos, retain } = CHANNELS[channel];
			const body = { t: Math.round(stampMs), seq, ...atPace(message, speed) };
			client.publish(robotTopic(RECORDINGS.key, key, channel), JSON.stringify(body), { qos, retain });
		},
		async leave() {
			if (client.connected)
				await client.publishAsync(connection, word('offline'), { qos: 1, retain: true }).catch(() => {});
			await client.endAsync(!client.connected).catch(() => {});
		}
	};
}

/** Played faster, everybody is faster. */
function atPace(message: Timed['message'], speed: number): Timed['message'] {
	if (speed === 1) return message;
	const faster = (value: number) => Math.max(-20, Math.min(20, value * speed));
	if ('speed' in message) return { ...message, speed: faster(message.speed) };
	if (!('persons' in message)) return message;
	return {
		...message,
		persons: message.persons.map((person) =>
			person.vx === undefined || person.vy === undefined
				? person
				: { ...person, vx: faster(person.vx), vy: faster(person.vy) }
		)
	};
}

function until(dueMs: number, signal: AbortSignal): Promise<void> | undefined {
	const wait = dueMs - Date.now();
	if (wait <= 0 || signal.aborted) return undefined;
	return new Promise((resolve) => {
		const timer = setTimeout(done, wait);
		function done() {
			clearTimeout(timer);
			signal.removeEventListener('abort', done);
			resolve();
		}
		signal.addEventListener('abort', done, { once: true });
	});
}
