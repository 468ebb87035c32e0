/** What the broker tests share: robots with secrets, clients that remember what they hear, waiting for a condition. */

import { connect, type IClientOptions, type MqttClient } from 'mqtt';
import { once, type EventEmitter } from 'node:events';
import { createServer, type AddressInfo } from 'node:net';
import { setTimeout as wait } from 'node:timers/promises';
import { robotTopic, type Channel } from '../../src/lib/contracts/mqtt.ts';
import {
	generateRobotSecret,
	robotSecretHashes,
	robotUsername,
	type RobotCredential
} from '../../src/lib/server/broker/credentials.ts';

export const VENUE = 'saltmarsh';
export const ROBOTS = ['porter-01', 'porter-02', 'porter-03'] as const;
export const SERVICE = { username: 'desk', password: generateRobotSecret() };

/** One broker that is running. */
export interface TestBroker {
	readonly robotUrl: string;
	readonly serviceUrl: string;
	/** Secret of a robot */
	secret(robot: string): string;
	/** Takes a credential back and tells the broker. */
	revoke(robot: string): Promise<void>;
	/** Stops the broker and starts it again on the same ports. */
	restart(): Promise<void>;
	stop(): Promise<void>;
}

export interface BrokerKind {
	readonly name: string;
	start(): Promise<TestBroker>;
}

/** Robots with fresh secrets. */
export function robotSet(robots: readonly string[] = ROBOTS) {
	const secrets = new Map<string, string>(robots.map((robot) => [robot, generateRobotSecret()]));
	const credentials = robots.map((robot, index): RobotCredential => {
		const hashes = robotSecretHashes(secrets.get(robot) ?? '');
		return {
			id: index + 1,
			venue: VENUE,
			robot,
			passwordHash: hashes.password_hash,
			mosquittoHash: hashes.mosquitto_hash
		};
	});
	const revoked = new Set<string>();
	return {
		secret: (robot: string) => secrets.get(robot) ?? '',
		credentials: () => credentials.filter(({ robot }) => !revoked.has(robot)),
		revoke: (robot: string) => void revoked.add(robot)
	};
}

export interface Heard {
	readonly topic: string;
	readonly text: string;
	readonly retain: boolean;
}

/** A client that does not reconnect and remembers every message. */
export interface TestClient {
	readonly mqtt: MqttClient;
	readonly heard: readonly Heard[];
	/** The first message on `topic`, waiting for it. */
	hears(topic: string): Promise<Heard>;
	/** Publishes and waits until the broker has it (QoS 1). */
	say(topic: string, body: unknown, options?: { retain?: boolean }): Promise<void>;
	/** Resolves when the broker, or the network, has ended the connection. */
	closed(): Promise<void>;
	/** Cuts the connection without a word, as a robot does that loses its network. */
	cut(): Promise<void>;
}

/** Connects; rejects with `code` 4 or 5 when the broker refuses the login. */
export async function signIn(url: string, options: IClientOptions): Promise<TestClient> {
	const defaults: IClientOptions = { protocolVersion: 4, reconnectPeriod: 0, connectTimeout: 10_000 };
	const mqtt = connect(url, { ...defaults, ...options });
	const heard: Heard[] = [];
	let closed = false;
	mqtt.on('message', (topic, payload, { retain }) => heard.push({ topic, text: payload.toString(), retain }));
	mqtt.on('close', () => (closed = true));
	open.add(mqtt);
	try {
		await once(mqtt as unknown as EventEmitter, 'connect');
	} catch (cause) {
		mqtt.end(true);
		throw cause;
	}
	mqtt.on('error', () => {}); // what follows shows as a close
	return {
		mqtt,
		heard,
		async hears(topic) {
			return until(() => heard.find((message) => message.topic === topic), `a message on ${topic}`);
		},
		async say(topic, body, { retain = false } = {}) {
			const payload = typeof body === 'string' || Buffer.isBuffer(body) ? body : JSON.stringify(body);
			await mqtt.publishAsync(topic, payload, { qos: 1, retain });
		},
		async closed() {
			await until(() => closed, 'the end of the connection');
		},
		async cut() {
			mqtt.stream.destroy();
			await until(() => closed, 'the end of the connection');
		}
	};
}

const open = new Set<MqttClient>();

/** Ends every client a test has left open. */
export async function endClients(): Promise<void> {
	await Promise.all([...open].map((mqtt) => mqtt.endAsync(true)));
	open.clear();
}

export const signInRobot = (broker: TestBroker, robot: string, options: IClientOptions = {}): Promise<TestClient> => {
	const username = robotUsername(VENUE, robot);
	return signIn(broker.robotUrl, { username, password: broker.secret(robot), clientId: username, ...options });
};

/** The application's own connection, listening to `filters`. */
export async function signInService(broker: TestBroker, ...filters: string[]): Promise<TestClient> {
	const client = await signIn(broker.serviceUrl, SERVICE);
	if (filters.length > 0) await client.mqtt.subscribeAsync(filters, { qos: 1 });
	return client;
}

export const topicOf = (robot: string, channel: Channel | 'command'): string => robotTopic(VENUE, robot, channel);

/** A pose as robots send it. */
export const pose = (seq: number, t = Date.now()) => ({
	t,
	seq,
	map: 'ground',
	x: seq / 10,
	y: 2,
	heading: 0,
	speed: 0.8
});

/** A state as robots send it. */
export const state = (seq: number, t = Date.now()) => ({
	t,
	seq,
	tasked: false,
	mode: 'automatic',
	paused: false,
	estop: false,
	charging: false,
	battery: 0.5,
	localized: true,
	errors: [],
	software: '4.2.0'
});

/** The first truthy value of `condition`, asked again and again for at most 20 s. */
export async function until<T>(condition: () => T | Promise<T>, what = 'a condition'): Promise<NonNullable<T>> {
	const deadline = Date.now() + 20_000;
	for (;;) {
		const value = await condition();
		if (value) return value;
		if (Date.now() > deadline) throw new Error(`Waited in vain for ${what}.`);
		await wait(5);
	}
}

/** A port nobody listens on now. */
export async function freePort(): Promise<number> {
	const server = createServer().listen(0, '127.0.0.1');
	await once(server, 'listening');
	const { port } = server.address() as AddressInfo;
	server.close();
	await once(server, 'close');
	return port;
}
