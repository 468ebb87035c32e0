/** How fast messages come in, beside a subscriber that does nothing with them, on the same broker in the same run. */

import { connectAsync, type MqttClient } from 'mqtt';
import { setTimeout as wait } from 'node:timers/promises';
import { isMainThread, parentPort, Worker, workerData } from 'node:worker_threads';
import { robotTopic } from '../../src/lib/contracts/mqtt.ts';
import { robotUsername } from '../../src/lib/server/broker/credentials.ts';
import { createIntake } from '../../src/lib/server/ingest/intake.ts';
import { startMqttSource } from '../../src/lib/server/ingest/mqtt-source.ts';
import { SOURCE_LOADER } from '../../src/lib/server/threads/locate.ts';
import { startOwnBroker } from '../support/brokers-own.ts';
import { SERVICE, until, VENUE, type TestBroker } from '../support/brokers.ts';

export interface IngestBench {
	readonly robots: number;
	/** messages/s of a subscriber that only counts */
	readonly noop_per_s: number;
	/** messages/s through the gate, half of them people messages of 20 persons */
	readonly ingest_per_s: number;
	/** ingest over no-op */
	readonly ratio: number;
	/** Messages the gate refused; anything but 0 makes the run worthless. */
	readonly rejected: number;
}

export interface IngestBenchOptions {
	readonly robots?: number;
	/** Measured time per phase, s */
	readonly seconds?: number;
	/** Phases of each kind, taken in turn so that a slow moment of the machine meets both */
	readonly rounds?: number;
	/** Where the broker comes from: our own unless given, for instance a Mosquitto. */
	readonly start?: (robots: readonly string[]) => Promise<TestBroker>;
}

const PERSONS = 20;
const WARM_UP_MS = 500;

/** Runs the benchmark; robots publish as fast as the broker takes it, the reader lives in a thread of its own. */
export async function benchIngest(options: IngestBenchOptions = {}): Promise<IngestBench> {
	const { robots = 200, seconds = 3, rounds = 3, start = startOwnBroker } = options;
	const names = Array.from({ length: robots }, (_, i) => `porter-${String(i + 1).padStart(3, '0')}`);
	const broker = await start(names);
	const fleet = await startFleet(broker, names);
	const rates = { noop: [] as number[], ingest: [] as number[] };
	let rejected = 0;
	try {
		for (let round = 0; round < rounds; round++) {
			for (const reader of ['noop', 'ingest'] as const) {
				const phase = await measure(broker.serviceUrl, reader, seconds);
				rates[reader].push(phase.received / phase.seconds);
				rejected += phase.rejected;
			}
		}
	} finally {
		await fleet.stop();
		await broker.stop();
	}
	const [noop, ingest] = [median(rates.noop), median(rates.ingest)];
	return {
		robots,
		noop_per_s: Math.round(noop),
		ingest_per_s: Math.round(ingest),
		ratio: Math.round((ingest / noop) * 100) / 100,
		rejected
	};
}

async function startFleet(broker: TestBroker, names: readonly string[]) {
	let stopped = false;
	const clients: MqttClient[] = [];
	for (const robot of names) {
		const username = robotUsername(VENUE, robot);
		const login = { username, password: broker.secret(robot), clientId: username };
		const client = await connectAsync(broker.robotUrl, { protocolVersion: 4, reconnectPeriod: 0, ...login });
		clients.push(client);
	}
	clients.forEach((client, i) => publishForEver(client, names[i]!, () => stopped));
	return {
		async stop() {
			stopped = true;
			await Promise.all(clients.map((client) => client.endAsync(true)));
		}
	};
}

/** Poses and people in turn, each as soon as the one before is written. */
function publishForEver(client: MqttClient, robot: string, stopped: () => boolean): void {
	const persons = Array.from({ length: PERSONS }, (_, id) => ({
		id,
		x: id / 3,
		y: id / 7,
		vx: 0.31,
		vy: -0.12,
		sd: 0.1
	}));
	const tails = [
		`"map":"ground","x":12.345,"y":6.789,"heading":0.5,"speed":0.8}`,
		JSON.stringify({ map: 'ground', range_m: 8, persons }).slice(1)
	];
	const topics = [robotTopic(VENUE, robot, 'pose'), robotTopic(VENUE, robot, 'people')];
	let seq = 0;
	// Once per turn of the event loop, so that one robot cannot keep the others from speaking.
	const again = () => void setImmediate(next);
	const next = () => {
		if (stopped() || !client.connected) return;
		const which = seq++ % 2;
		client.publish(topics[which]!, `{"t":${Date.now()},"seq":${seq},${tails[which]}`, { qos: 0 }, again);
	};
	next();
}

interface Reading {
	readonly url: string;
	readonly reader: 'noop' | 'ingest';
	readonly seconds: number;
	readonly password: string;
}

interface Phase {
	readonly received: number;
	readonly rejected: number;
	readonly seconds: number;
}

async function measure(url: string, reader: Reading['reader'], seconds: number): Promise<Phase> {
	const workerData: Reading = { url, reader, seconds, password: SERVICE.password };
	const worker = new Worker(new URL(import.meta.url), { workerData, execArgv: ['--import', SOURCE_LOADER] });
	return new Promise((resolve, reject) => {
		worker.once('message', resolve);
		worker.once('error', reject);
	});
}

async function read({ url, reader, seconds, password }: Reading): Promise<Phase> {
	let received = 0;
	let rejected = 0;
	const intake = createIntake({
		robots: (venue) => venue === VENUE,
		rejected: { record: () => rejected++ },
		onObservation: () => received++
	});
	const source = startMqttSource({
		url,
		username: SERVICE.username,
		password,
		venues: [],
		onMessage:
			reader === 'noop' ? () => received++ : (topic, payload, kept) => intake.take(topic, payload, kept, Date.now())
	});
	await until(() => received > 0, 'the first message');
	await wait(WARM_UP_MS);
	received = 0;
	const startedAt = performance.now();
	await wait(seconds * 1000);
	const phase = { received, rejected, seconds: (performance.now() - startedAt) / 1000 };
	await source.stop();
	return phase;
}

function median(values: readonly number[]): number {
	const sorted = [...values].sort((a, b) => a - b);
	return sorted[Math.floor(sorted.length / 2)] ?? 0;
}

if (!isMainThread) {
	void read(workerData as Reading).then((phase) => parentPort?.postMessage(phase));
}
