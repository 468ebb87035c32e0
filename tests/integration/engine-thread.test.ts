import { connectAsync, type MqttClient } from 'mqtt';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Worker } from 'node:worker_threads';
import { afterEach, beforeEach, expect, it } from 'vitest';
import { robotTopic, type Channel } from '../../src/lib/contracts/mqtt.ts';
import type { LiveAlarm, LiveFrame, LiveHealth } from '../../src/lib/contracts/live.ts';
import { generateRobotSecret, robotSecretHashes } from '../../src/lib/server/broker/credentials.ts';
import { openDatabase, type OpenDatabase } from '../../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import { insertFloor } from '../../src/lib/server/repositories/floors.ts';
import { readSettings } from '../../src/lib/server/settings.ts';
import { startWorker } from '../../src/lib/server/threads/locate.ts';
import { startThreads, type Threads } from '../../src/lib/server/threads/supervisor.ts';
import { freePort, SERVICE, until } from '../support/brokers.ts';
import { startBrokerThread } from '../support/brokers-own.ts';
import { FLOOR, MODEL } from '../support/room-with-robot.ts';

const VENUE = 'test';
const secret = generateRobotSecret();
let folder: string;
let database: OpenDatabase;
let threads: Threads;
let robot: MqttClient | undefined;
let frame: LiveFrame | null;
let health: LiveHealth | null;
let alarms: LiveAlarm[];
let workers: Map<string, Worker>;

const quiet = { info() {}, error() {} };

beforeEach(async () => {
	folder = mkdtempSync(join(tmpdir(), 'engine-'));
	const path = join(folder, 'desk.db');
	database = openDatabase(path);
	await migrateToLatest(database.db);
	await seed();
	frame = null;
	health = null;
	alarms = [];
	workers = new Map();
	threads = await start({ MQTT_PORT: '0' });
});

const start = (env: Record<string, string>) =>
	startThreads({
		settings: readSettings({ DATABASE_PATH: join(folder, 'desk.db'), LOG_LEVEL: 'silent', ...env }),
		log: quiet,
		onMessage(message) {
			if (message.type === 'frame') frame = message.frame;
			if (message.type === 'alarm') alarms.push(message.alarm);
		},
		onHealth: (news) => (health = news),
		spawn(name, options) {
			const worker = startWorker(name, options);
			workers.set(name, worker);
			return worker;
		}
	});

afterEach(async () => {
	await robot?.endAsync(true);
	await threads.stop();
	await database.close();
	rmSync(folder, { recursive: true, force: true });
});

async function seed(): Promise<void> {
	const { db } = database;
	const venue = { key: VENUE, name: 'Test hall', town: 'Pellmouth', time_zone: 'Europe/London' };
	const { id: venueId } = await db.insertInto('venue').values(venue).returning('id').executeTakeFirstOrThrow();
	await insertFloor(db, { venueId, floor: FLOOR, sort: 0, nowMs: Date.now() });
	const { id: modelId } = await db
		.insertInto('robot_model')
		.values({
			key: MODEL.key,
			name: MODEL.name,
			letter: MODEL.letter,
			length_m: MODEL.length,
			width_m: MODEL.width,
			radius_m: MODEL.radius,
			max_speed_m_s: MODEL.maxSpeed
		})
		.returning('id')
		.executeTakeFirstOrThrow();
	const { id } = await db
		.insertInto('robot')
		.values({ venue_id: venueId, key: 't1', mark: 'T1', model_id: modelId })
		.returning('id')
		.executeTakeFirstOrThrow();
	await db
		.insertInto('robot_credential')
		.values({ robot_id: id, ...robotSecretHashes(secret), created_at_ms: Date.now() })
		.execute();
}

/** A robot that stands on its way with people before it. */
async function startStuckRobot(): Promise<void> {
	const username = `${VENUE}/t1`;
	const client = await connectAsync(`mqtt://127.0.0.1:${threads.brokerPort}`, {
		protocolVersion: 4,
		clientId: username,
		username,
		password: secret,
		reconnectPeriod: 200
	});
	robot = client;
	let seq = 0;
	const send = (channel: Channel, message: object) => {
		if (!client.connected) return;
		seq += 1;
		client.publish(robotTopic(VENUE, 't1', channel), JSON.stringify({ t: Date.now(), seq, ...message }));
	};
	const persons = [3, 4, 5, 6, 7].map((y, index) => ({ id: `p${index}`, x: 6.2, y, sd: 0.05 }));
	const timer = setInterval(() => {
		send('pose', { map: 'test-map', x: 5, y: 5, heading: 0, speed: 0 });
		send('people', { map: 'test-map', range_m: 15, persons });
		if (seq % 10 < 3) send('state', STATE);
	}, 150);
	client.on('end', () => clearInterval(timer));
}

const STATE = {
	tasked: true,
	task: { id: 'job', goal: { x: 18, y: 5 } },
	mode: 'automatic',
	paused: false,
	estop: false,
	charging: false,
	battery: 0.7,
	localized: true,
	errors: [],
	software: '1.2.3'
};

const openIncidents = () => database.db.selectFrom('incident').selectAll().where('ended_ms', 'is', null).execute();

it('takes a robot from its message to a frame, an incident and an alarm', async () => {
	await startStuckRobot();
	await until(() => frame?.robots[0]?.x_m === 5, 'the robot in a frame');
	await until(() => frame?.persons.length === 5, 'five people in the frame');
	const alarm = await until(() => alarms[0], 'an alarm');
	expect(alarm).toMatchObject({ type: 'freeze', state: 'unacknowledged', place: 'West, Test floor', robots: ['t1'] });
	const [incident] = await openIncidents();
	expect(incident).toMatchObject({ kind: 'freeze', alarm_id: alarm.id, software: '1.2.3' });
	expect(alarm.raised_at_ms - alarm.onset_ms).toBeLessThan(10_000);
	await until(() => frame?.halts[0]?.incident === incident?.id, 'the halt in a frame');
});

it('starts a dead engine again, says so meanwhile, and goes on with the halt that was open', async () => {
	await startStuckRobot();
	await until(() => alarms[0], 'an alarm');
	await workers.get('engine')!.terminate();
	await until(() => health?.engine === false, 'word that the engine is down');
	expect(health?.troubles[0]).toMatch(/engine stopped/);
	frame = null;
	await until(() => health?.engine === true, 'the engine to be back');
	await until(() => frame?.halts.length === 1, 'the halt in a frame');
	expect(await openIncidents()).toHaveLength(1);
	expect(await database.db.selectFrom('alarm').select('id').execute()).toHaveLength(1);
});

it('hears the robots again after the broker died, on the same port', async () => {
	await startStuckRobot();
	await until(() => frame?.robots[0]?.x_m === 5, 'the robot in a frame');
	const port = threads.brokerPort;
	await workers.get('broker')!.terminate();
	await until(() => health?.broker === false, 'word that the broker is down');
	await until(() => health?.broker === true && health.messages_per_s > 0, 'messages again');
	expect(threads.brokerPort).toBe(port);
});

it('starts without a broker, says that nobody can be heard, raises one alarm for it, and goes on when the broker comes', async () => {
	await threads.stop();
	const port = await freePort();
	threads = await start({
		MQTT_URL: `mqtt://127.0.0.1:${port}`,
		MQTT_USERNAME: SERVICE.username,
		MQTT_PASSWORD: SERVICE.password
	});
	await until(() => health?.engine && !health.broker, 'word that there is no broker');
	expect(health?.troubles.join(' ')).toMatch(/Robots cannot be heard/);
	const alarm = await until(() => alarms.find(({ type }) => type === 'ingest'), 'the alarm about it');
	expect(alarm).toMatchObject({ state: 'unacknowledged', robots: [] });
	const broker = await startBrokerThread({ database_path: join(folder, 'desk.db'), port });
	try {
		await until(() => health?.broker === true, 'the broker to be found');
		await until(() => alarms.at(-1)?.state === 'returned', 'the alarm to return');
		expect(alarms.filter(({ type }) => type === 'ingest').map(({ id }) => id)).toEqual([alarm.id, alarm.id]);
	} finally {
		await threads.stop();
		await broker.stop();
	}
});

it('says in one sentence that the broker’s port is taken', async () => {
	const taken = String(threads.brokerPort);
	await expect(start({ MQTT_PORT: taken })).rejects.toThrow(new RegExp(`port ${taken}`, 'i'));
});
