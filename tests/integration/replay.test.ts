/** Recordings and the simulated fleet on the program's own broker, heard as the desk hears them. */

import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import mqtt, { type MqttClient } from 'mqtt';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Answer, Connection, parseTopic, People, robotTopic, type Command } from '../../src/lib/contracts/mqtt.ts';
import { openDatabase, type OpenDatabase } from '../../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import { readFloor } from '../../src/lib/server/repositories/floors.ts';
import { startFleet } from '../../simulators/mqtt-fleet.ts';
import { ensureCredentials, provisionVenue, type Passwords } from '../../simulators/provision.ts';
import { floorOf, RECORDINGS } from '../../simulators/recordings/floor.ts';
import { observersOf } from '../../simulators/recordings/observers.ts';
import { parsePeople, type Recording } from '../../simulators/recordings/parse.ts';
import { playRecording } from '../../simulators/recordings/play.ts';
import { fleetOf, SALTMARSH } from '../../simulators/venue/saltmarsh.ts';
import { startBrokerThread, type BrokerThread } from '../support/brokers-own.ts';
import { freePort, SERVICE, until } from '../support/brokers.ts';

const folder = mkdtempSync(join(tmpdir(), 'replay-'));
const databasePath = join(folder, 'test.db');
/** 40 instants, 0.4 s apart but for one gap, two people. */
const rows = Array.from({ length: 40 }, (_, i) => {
	const t = (i * 0.4 + (i >= 20 ? 3 : 0)).toFixed(3);
	return `${t},1,${(i * 0.25).toFixed(3)},1.000\n${t},2,${(10 - i * 0.2).toFixed(3)},2.500`;
});
const recording: Recording = {
	name: 'Two people',
	frames: parsePeople(`t_s,id,x_m,y_m\n${rows.join('\n')}\n`),
	robot: null
};
const floor = floorOf(recording, null);
const observers = observersOf(recording, floor, 2, true);

interface Heard {
	readonly robot: string;
	readonly channel: string;
	readonly message: unknown;
}

let database: OpenDatabase;
let broker: BrokerThread;
let url: string;
let passwords: Passwords;
let fleetPasswords: Passwords;
let desk: MqttClient;
const heard: Heard[] = [];

beforeAll(async () => {
	database = openDatabase(databasePath);
	const { db } = database;
	await migrateToLatest(db);
	const nowMs = Date.now();
	const robots = observers.map(({ robot }) => robot);
	const { venueId } = await provisionVenue(db, { venue: RECORDINGS, floors: [floor], robots, nowMs });
	passwords = (
		await ensureCredentials(
			db,
			venueId,
			robots.map(({ key }) => key),
			{},
			nowMs
		)
	).passwords;
	const fleet = fleetOf(2);
	const hall = await provisionVenue(db, { venue: SALTMARSH.venue, floors: [], robots: fleet, nowMs });
	fleetPasswords = (
		await ensureCredentials(
			db,
			hall.venueId,
			fleet.map(({ key }) => key),
			{},
			nowMs
		)
	).passwords;
	const port = await freePort();
	broker = await startBrokerThread({ database_path: databasePath, port });
	url = `mqtt://127.0.0.1:${port}`;
	desk = await mqtt.connectAsync(url, { protocolVersion: 4, ...SERVICE });
	desk.on('message', (topic, payload) => {
		const at = parseTopic(topic);
		if (at) heard.push({ robot: at.robot, channel: at.channel, message: JSON.parse(payload.toString()) });
	});
	await desk.subscribeAsync('elbowroom/v1/+/+/+', { qos: 1 });
});

afterAll(async () => {
	await desk.endAsync(true);
	await broker.stop();
	await database.close();
	rmSync(folder, { recursive: true, force: true });
});

const of = <T>(robot: string, channel: string, schema: { parse(value: unknown): T }): T[] =>
	heard.filter((h) => h.robot === robot && h.channel === channel).map((h) => schema.parse(h.message));

describe('a replayed recording', () => {
	it('provisions a floor that the desk can read back, and nothing twice', async () => {
		const stored = await readFloor(database.db, 'recording-two-people');
		expect(stored?.floor).toEqual(floor);
		const robots = observers.map(({ robot }) => robot);
		const again = await provisionVenue(database.db, { venue: RECORDINGS, floors: [floor], robots, nowMs: Date.now() });
		expect(again.added).toBe(0);
	});

	it('arrives as one people message per recorded instant and observer, on the recorded time grid', async () => {
		const played = await playRecording({
			recording,
			observers,
			url,
			passwords,
			speed: 8,
			loop: false,
			signal: new AbortController().signal
		});
		expect(played.looks).toBe(40);
		const keys = observers.map(({ robot }) => robot.key);
		await until(
			() => keys.every((key) => of(key, 'connection', Connection).at(-1)?.status === 'offline'),
			'the goodbyes'
		);
		for (const [i, key] of keys.entries()) {
			const looks = of(key, 'people', People);
			expect(looks).toHaveLength(40);
			const start = looks[0]!.t;
			looks.forEach(({ t, seq, persons }, k) => {
				const frame = recording.frames[k]!;
				expect(seq).toBe(k);
				expect(Math.abs(t - start - (frame.time * 1000) / 8)).toBeLessThanOrEqual(1);
				for (const { id, x, y } of persons) {
					const truly = frame.people.find((person) => person.id === id)!;
					expect(x).toBeCloseTo(observers[i]!.frame.x(truly.x, truly.y), 5);
					expect(y).toBeCloseTo(observers[i]!.frame.y(truly.x, truly.y), 5);
				}
			});
			expect(of(key, 'connection', Connection).map(({ status }) => status)).toEqual(['online', 'offline']);
		}
	});
});

describe('the simulated fleet', () => {
	it('connects, speaks, answers a command, and says goodbye', async () => {
		const troubles: string[] = [];
		const fleet = startFleet({
			scenario: 'quiet-morning',
			robots: 2,
			seed: 1,
			url,
			credentials: fleetPasswords,
			onTrouble: (message) => troubles.push(message)
		});
		await fleet.ready;
		const [robot] = fleet.robots as [string];
		await until(() => of(robot, 'people', People).length > 3, 'what the robot sees');
		const command: Command = { id: 'c-1', kind: 'pause', expires_at: Date.now() + 60_000 };
		await desk.publishAsync(robotTopic(SALTMARSH.venue.key, robot, 'command'), JSON.stringify(command), { qos: 1 });
		await until(() => of(robot, 'answer', Answer).length >= 2, 'the answers');
		expect(of(robot, 'answer', Answer)).toEqual([
			{ id: 'c-1', status: 'seen' },
			{ id: 'c-1', status: 'done' }
		]);
		// Clocks of the quiet morning are well kept.
		expect(Math.abs(of(robot, 'people', People).at(-1)!.t - Date.now())).toBeLessThan(5000);
		await fleet.stop();
		await until(() => of(robot, 'connection', Connection).at(-1)?.status === 'offline', 'the goodbye');
		expect(troubles).toEqual([]);
	});

	it('reports a robot that the broker does not let in, once, and goes on', async () => {
		const troubles: string[] = [];
		const fleet = startFleet({
			scenario: 'quiet-morning',
			robots: 1,
			seed: 1,
			url,
			credentials: { 'porter-01': 'not the password' },
			onTrouble: (message) => troubles.push(message)
		});
		await until(() => troubles.length > 0, 'the refusal');
		expect(troubles[0]).toMatch(/^porter-01 cannot sign in to the broker/);
		await fleet.stop();
		expect(troubles).toHaveLength(1);
	});
});
