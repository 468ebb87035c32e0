/** The simulated fleet on a real broker: one MQTT 3.1.1 client per robot, each with its own credential and last will. */

import mqtt, { type MqttClient } from 'mqtt';
import { CHANNELS, Command, robotTopic, type Connection } from '../src/lib/contracts/mqtt.ts';
import type { Agent } from './robots/agent.ts';
import type { TruthKeeper } from './robots/truth-keeper.ts';
import { scenarioOf, type Scenario, type ScenarioName } from './scenarios.ts';
import type { Delivery } from './transport/link.ts';
import { fleetOf, SALTMARSH } from './venue/saltmarsh.ts';
import { World } from './world.ts';

export interface FleetOptions {
	readonly scenario: ScenarioName | Scenario;
	readonly robots: number;
	readonly seed: number;
	/** Address of the broker, for example mqtt://127.0.0.1:1883 */
	readonly url: string;
	/** Robot key → password. Robots without one are left out. */
	readonly credentials: Readonly<Record<string, string>>;
	/** Simulated seconds per second, 0.1…10. */
	readonly speed?: number;
	/** Told in one sentence when a robot cannot sign in; once per robot. */
	readonly onTrouble?: (message: string) => void;
}

export interface RunningFleet {
	/** Robots that take part. */
	readonly robots: readonly string[];
	readonly world: World;
	readonly truth: TruthKeeper;
	/** ms since the epoch at simulation time `seconds`, for comparing true times with recorded ones. */
	wallTime(seconds: number): number;
	/** Resolves once every robot has been connected. */
	readonly ready: Promise<void>;
	/** Says goodbye for every robot and closes all connections. */
	stop(): Promise<void>;
}

const STEP = 0.1;
/** s the simulation may lag before it skips ahead; a laptop that slept must not replay the night. */
const MOST_LAG = 3;

/** Starts the fleet and returns at once; robots connect in the background and keep trying. */
export function startFleet(options: FleetOptions): RunningFleet {
	const { seed, url, credentials, speed = 1, onTrouble = () => {} } = options;
	const scenario = typeof options.scenario === 'string' ? scenarioOf(options.scenario) : options.scenario;
	const fleet = fleetOf(options.robots).filter(({ key }) => key in credentials);
	const world = new World({ venue: SALTMARSH, fleet, scenario, seed, epoch: Date.now() / 1000, pace: speed });
	const clients = new Map(
		world.agents.map((agent) => {
			const key = agent.vehicle.robot.key;
			return [key, connectRobot(agent, world, url, credentials[key]!, onTrouble)] as const;
		})
	);

	// Building the venue took a while; the robots' clocks start now.
	world.clock.epoch = Date.now() / 1000;
	let last = performance.now();
	let owed = 0;
	const timer = setInterval(() => {
		const now = performance.now();
		owed += ((now - last) / 1000) * speed;
		last = now;
		if (owed > MOST_LAG * speed) {
			world.clock.epoch += (owed - STEP) / speed;
			owed = STEP;
		}
		for (; owed >= STEP; owed -= STEP) for (const delivery of world.step(STEP)) publish(delivery, clients);
	}, 50);

	return {
		robots: fleet.map(({ key }) => key),
		world,
		truth: world.truth,
		wallTime: (seconds) => (world.clock.epoch + seconds / speed) * 1000,
		ready: Promise.all([...clients.values()].map(({ connected }) => connected)).then(() => {}),
		async stop() {
			clearInterval(timer);
			await Promise.all(
				world.agents.map((agent) => {
					const { client, topic } = clients.get(agent.vehicle.robot.key)!;
					return sayGoodbye(client, topic('connection'), agent.goodbye(world.time));
				})
			);
		}
	};
}

/** Clients cut off on purpose: they come back when their robot does, and not by themselves. */
const gone = new WeakSet<MqttClient>();

interface RobotClient {
	readonly client: MqttClient;
	readonly connected: Promise<void>;
	topic(channel: string): string;
}

function connectRobot(
	agent: Agent,
	world: World,
	url: string,
	password: string,
	onTrouble: (message: string) => void
): RobotClient {
	const { key } = agent.vehicle.robot;
	const venue = SALTMARSH.venue.key;
	const username = `${venue}/${key}`;
	const topic = (channel: string) => robotTopic(venue, key, channel as 'pose');
	const will = {
		topic: topic('connection'),
		payload: Buffer.from(JSON.stringify(agent.lastWill(world.time))),
		qos: 1 as const,
		retain: true
	};
	const client = mqtt.connect(url, {
		protocolVersion: 4,
		clientId: username,
		username,
		password,
		clean: true,
		keepalive: 10,
		reconnectPeriod: 2000,
		queueQoSZero: false,
		will
	});
	let told = false;
	client.on('error', (error) => {
		if (told) return;
		told = true;
		onTrouble(`${key} cannot sign in to the broker: ${error.message || 'no connection'}.`);
	});
	client.on('close', () => {
		// The stamp of the next last will is that of the next connection.
		will.payload = Buffer.from(JSON.stringify(agent.lastWill(world.time)));
	});
	client.on('message', (_topic, payload) => {
		const command = readCommand(payload);
		if (command) world.command(key, command);
	});
	const connected = new Promise<void>((resolve) => {
		client.on('connect', () => {
			const online: Connection = { t: agent.link.stamp(world.time), status: 'online' };
			client.publish(topic('connection'), JSON.stringify(online), { qos: 1, retain: true });
			client.subscribe(topic('command'), { qos: 1 });
			resolve();
		});
	});
	return { client, connected, topic };
}

function readCommand(payload: Buffer): Command | null {
	try {
		return Command.parse(JSON.parse(payload.toString()));
	} catch {
		// A robot ignores what it does not understand.
		return null;
	}
}

function publish({ robot, channel, payload, byWill }: Delivery, clients: ReadonlyMap<string, RobotClient>): void {
	const { client, topic } = clients.get(robot)!;
	if (byWill) {
		// Gone without a goodbye: the broker sends the last will itself.
		gone.add(client);
		client.end(true);
		return;
	}
	if (channel === 'connection') {
		if (gone.delete(client)) client.reconnect();
		return;
	}
	if (!client.connected) return;
	const body = typeof payload === 'string' ? payload : JSON.stringify(payload);
	const { qos, retain } = channel === 'unknown' ? { qos: 0 as const, retain: false } : CHANNELS[channel];
	client.publish(topic(channel), body, { qos, retain });
}

async function sayGoodbye(client: MqttClient, topic: string, goodbye: Connection): Promise<void> {
	if (client.connected) {
		await client.publishAsync(topic, JSON.stringify(goodbye), { qos: 1, retain: true }).catch(() => {});
	}
	// Without a parting packet the broker would send the last will after the goodbye.
	await client.endAsync(!client.connected).catch(() => {});
}
