/** What only our own broker promises, and its life as a thread. */

import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { createServer, type AddressInfo } from 'node:net';
import { once } from 'node:events';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { openDatabase } from '../../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import { endClients, signInRobot, signInService, topicOf, type TestBroker } from '../support/brokers.ts';
import { OWN_BROKER, startBrokerThread, startOwnBroker } from '../support/brokers-own.ts';

describe('the own broker', () => {
	let broker: TestBroker;
	beforeAll(async () => {
		broker = await OWN_BROKER.start();
	});
	afterEach(endClients);
	afterAll(() => broker.stop());

	it('never keeps a command: neither a retained one nor one for a robot that is away', async () => {
		const topic = topicOf('porter-01', 'command');
		const asked = { clean: false };
		const before = await signInRobot(broker, 'porter-01', asked);
		await before.mqtt.subscribeAsync(topic, { qos: 1 });
		await before.mqtt.endAsync();
		const service = await signInService(broker);
		await service.say(topic, 'kept', { retain: true });
		await service.say(topic, 'queued');

		const after = await signInRobot(broker, 'porter-01', asked);
		await after.mqtt.subscribeAsync(topic, { qos: 1 });
		await service.say(topic, 'fresh');
		await after.hears(topic);
		expect(after.heard.map(({ text }) => text)).toEqual(['fresh']);
	});

	it('passes an answer on but does not keep it, even when asked to', async () => {
		const topic = topicOf('porter-01', 'answer');
		const service = await signInService(broker, topic);
		const robot = await signInRobot(broker, 'porter-01');
		await robot.say(topic, 'once', { retain: true });
		expect((await service.hears(topic)).text).toBe('once');
		const late = await signInService(broker, topic);
		await robot.say(topic, 'twice');
		await late.hears(topic);
		expect(late.heard.map(({ text }) => text)).toEqual(['twice']);
	});

	it('says no to a subscription that is not allowed', async () => {
		const robot = await signInRobot(broker, 'porter-01');
		await expect(robot.mqtt.subscribeAsync('#')).rejects.toThrow();
		expect(robot.mqtt.connected).toBe(true);
	});
});

it('lets 200 robots in that all come at once', async () => {
	const robots = Array.from({ length: 200 }, (_, i) => `sweeper-${i}`);
	const broker = await startOwnBroker(robots);
	try {
		const clients = await Promise.all(robots.map((robot) => signInRobot(broker, robot)));
		expect(clients.every(({ mqtt }) => mqtt.connected)).toBe(true);
	} finally {
		await endClients();
		await broker.stop();
	}
});

describe('the broker thread', () => {
	let folder = '';
	beforeAll(async () => {
		folder = await mkdtemp(join(tmpdir(), 'thread-'));
	});
	afterAll(() => rm(folder, { recursive: true, force: true }));

	it('says in one sentence that its port is taken, and ends', async () => {
		const other = createServer().listen(0, '127.0.0.1');
		await once(other, 'listening');
		const { port } = other.address() as AddressInfo;
		try {
			const thread = await startBrokerThread({ port, database_path: await migrated(join(folder, 'taken.db')) });
			expect(thread.said).toEqual([
				{
					type: 'failed',
					message: expect.stringMatching(`^Port ${port} on 127.0.0.1 is taken .*MQTT_PORT\\.$`) as string
				}
			]);
			await thread.stop();
		} finally {
			other.close();
		}
	});

	it('says in one sentence that the database cannot be read, and ends', async () => {
		const path = join(folder, 'no.db');
		await writeFile(path, 'this is no database, and long enough to be looked at as one. '.repeat(100));
		const thread = await startBrokerThread({ database_path: path });
		expect(thread.said).toMatchObject([{ type: 'failed', message: expect.stringMatching(/^[^.]+.*\.$/) as string }]);
		await thread.stop();
	});

	it('says when it is ready and when it has stopped, and frees its port', async () => {
		const path = await migrated(join(folder, 'life.db'));
		const thread = await startBrokerThread({ database_path: path });
		expect(thread.said).toMatchObject([{ type: 'ready' }]);
		const { port } = thread.said[0] as { port: number };
		await thread.stop();
		expect(thread.said[1]).toEqual({ type: 'stopped' });
		const again = await startBrokerThread({ database_path: path, port });
		expect(again.said).toEqual([{ type: 'ready', port }]);
		await again.stop();
	});
});

async function migrated(path: string): Promise<string> {
	const database = openDatabase(path);
	await migrateToLatest(database.db);
	await database.close();
	return path;
}
