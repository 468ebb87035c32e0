/** The application's own broker as it runs in production: in its worker thread, on a database file. */

import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Worker } from 'node:worker_threads';
import type { BrokerStart, FromBroker, ToBroker } from '../../src/lib/contracts/threads.ts';
import type { RobotCredential } from '../../src/lib/server/broker/credentials.ts';
import { openDatabase, type OpenDatabase } from '../../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import { SOURCE_LOADER } from '../../src/lib/server/threads/locate.ts';
import { freePort, robotSet, SERVICE, VENUE, until, type BrokerKind, type TestBroker } from './brokers.ts';

const ENTRY = new URL('../../src/lib/server/threads/broker.ts', import.meta.url);

export const OWN_BROKER: BrokerKind = { name: 'the own broker', start: () => startOwnBroker() };

/** Starts it with these robots, those of the tests when none are named. */
export async function startOwnBroker(names?: readonly string[]): Promise<TestBroker> {
	const folder = await mkdtemp(join(tmpdir(), 'broker-'));
	const robots = robotSet(names);
	const path = join(folder, 'test.db');
	const database = openDatabase(path);
	await migrateToLatest(database.db);
	await insertRobots(database, robots.credentials());

	const port = await freePort();
	let thread = await startBrokerThread({ database_path: path, port });
	const url = `mqtt://127.0.0.1:${port}`;
	return {
		robotUrl: url,
		serviceUrl: url,
		secret: robots.secret,
		async revoke(robot) {
			await database.db
				.updateTable('robot_credential')
				.set({ revoked_at_ms: Date.now() })
				.where('robot_id', 'in', (query) => query.selectFrom('robot').select('id').where('key', '=', robot))
				.execute();
			thread.send({ type: 'reload' });
		},
		async restart() {
			await thread.stop();
			thread = await startBrokerThread({ database_path: path, port });
		},
		async stop() {
			await thread.stop();
			await database.close();
			await rm(folder, { recursive: true, force: true });
		}
	};
}

export interface BrokerThread {
	readonly said: readonly FromBroker[];
	send(message: ToBroker): void;
	/** Resolves when the thread has ended by itself after being told to. */
	stop(): Promise<void>;
}

/** Starts the thread and waits for its first word, be it `ready` or `failed`. */
export async function startBrokerThread(start: Partial<BrokerStart>): Promise<BrokerThread> {
	const workerData: BrokerStart = {
		database_path: ':memory:',
		port: 0,
		host: '127.0.0.1',
		service_username: SERVICE.username,
		service_password: SERVICE.password,
		log_level: 'silent',
		...start
	};
	const worker = new Worker(ENTRY, { workerData, execArgv: ['--import', SOURCE_LOADER] });
	const said: FromBroker[] = [];
	const trouble: Error[] = [];
	let ended = false;
	worker.on('message', (message: FromBroker) => said.push(message));
	worker.on('error', (error) => trouble.push(error));
	worker.on('exit', () => (ended = true));
	await until(() => said.length > 0 || ended, 'the first word of the broker thread');
	if (trouble[0]) throw trouble[0];
	return {
		said,
		send: (message) => worker.postMessage(message),
		async stop() {
			if (!ended) worker.postMessage({ type: 'stop' } satisfies ToBroker);
			await until(() => ended, 'the end of the broker thread');
		}
	};
}

async function insertRobots({ db }: OpenDatabase, credentials: readonly RobotCredential[]): Promise<void> {
	await db
		.insertInto('venue')
		.values({ id: 1, key: VENUE, name: 'Saltmarsh Hall', town: 'Pellmouth', time_zone: 'Europe/London' })
		.execute();
	await db
		.insertInto('robot_model')
		.values({
			id: 1,
			key: 'porter',
			name: 'Porter',
			letter: 'P',
			length_m: 0.9,
			width_m: 0.6,
			radius_m: 0.5,
			max_speed_m_s: 1.2
		})
		.execute();
	for (const { id, robot, passwordHash, mosquittoHash } of credentials) {
		await db
			.insertInto('robot')
			.values({ id, venue_id: 1, key: robot, mark: `P${id}`, model_id: 1 })
			.execute();
		await db
			.insertInto('robot_credential')
			.values({ robot_id: id, password_hash: passwordHash, mosquitto_hash: mosquittoHash, created_at_ms: Date.now() })
			.execute();
	}
}
