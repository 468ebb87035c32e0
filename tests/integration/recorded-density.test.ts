/**
 * Recorded pedestrian tracks through a real broker, the ingest and the engine, held to densities computed elsewhere from the
 * same tracks (`voronoi_NAME.json` beside the data, whose description names how they were made and checked).
 */

import mqtt, { type MqttClient } from 'mqtt';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { CHANNELS, robotTopic } from '../../src/lib/contracts/mqtt.ts';
import type { Zone } from '../../src/lib/domain/floor.ts';
import { boundsOf } from '../../src/lib/domain/geometry/polygon.ts';
import type { Frame } from '../../src/lib/domain/engine/frame.ts';
import type { Observation } from '../../src/lib/domain/engine/observation.ts';
import { DEFAULT_RULES } from '../../src/lib/domain/engine/rules.ts';
import { createVenueContext, createVenueState, stepVenue } from '../../src/lib/domain/engine/venue-engine.ts';
import { openDatabase, type OpenDatabase } from '../../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import { createIntake } from '../../src/lib/server/ingest/intake.ts';
import { readFloors } from '../../src/lib/server/repositories/floors.ts';
import { ensureCredentials, provisionVenue, type Passwords } from '../../simulators/provision.ts';
import { floorKeyOf, floorOf, readSurvey, RECORDINGS } from '../../simulators/recordings/floor.ts';
import { observersOf, timelineOf, type Observer, type Timed } from '../../simulators/recordings/observers.ts';
import { readRecording, type Recording } from '../../simulators/recordings/parse.ts';
import { startBrokerThread, type BrokerThread } from '../support/brokers-own.ts';
import { freePort, SERVICE, until } from '../support/brokers.ts';

const DATA = fileURLToPath(new URL('../../../shared/datasets/', import.meta.url));
const NAMES = ['eth_biwi_eth', 'ucy_univ', 'juelich_bidir_400_b03', 'juelich_bottleneck_040c', 'juelich_ao_300'];

interface Reference {
	readonly frames: readonly {
		readonly t_s: number;
		readonly n: number;
		readonly classic: number;
		readonly voronoi_cutoff: number;
		readonly on_edge: boolean | number;
	}[];
}

/** persons/m²; the references are given to six decimals. */
const REFERENCE_ROUNDING = 5e-6;

const present = existsSync(DATA);
if (!present) console.log('The recorded tracks are not here (../shared/datasets), so their densities are not checked.');

describe.runIf(present)('density of recorded tracks', () => {
	const folder = mkdtempSync(join(tmpdir(), 'recorded-'));
	let database: OpenDatabase;
	let broker: BrokerThread;
	let url: string;

	beforeAll(async () => {
		const databasePath = join(folder, 'test.db');
		database = openDatabase(databasePath);
		await migrateToLatest(database.db);
		const port = await freePort();
		url = `mqtt://127.0.0.1:${port}`;
		broker = await startBrokerThread({ database_path: databasePath, port });
	});

	afterAll(async () => {
		await broker.stop();
		await database.close();
		rmSync(folder, { recursive: true, force: true });
	});

	/** Stores floor and observers as `npm run replay` does, and gives the secrets. */
	async function provision(recording: Recording, path: string, count: number, turned: boolean) {
		const floor = floorOf(recording, readSurvey(path, recording.name));
		const observers = observersOf(recording, floor, count, turned);
		const robots = observers.map(({ robot }) => robot);
		const plan = { venue: RECORDINGS, floors: [floor], robots, nowMs: Date.now() };
		const { venueId } = await provisionVenue(database.db, plan);
		const keys = robots.map(({ key }) => key);
		const { passwords } = await ensureCredentials(database.db, venueId, keys, {}, Date.now());
		broker.send({ type: 'reload' });
		return { observers, passwords };
	}

	/** Plays a recording as fast as the broker takes it; the engine runs on the recording's clock. */
	async function play(name: string, count: number, turned: boolean, take: (t: number, frame: Frame) => void) {
		const path = join(DATA, `${name}.csv.gz`);
		const recording = readRecording(path);
		const { observers, passwords } = await provision(recording, path, count, turned);
		const [stored] = (await readFloors(database.db, [RECORDINGS.key])).filter(
			({ floor }) => floor.key === floorKeyOf(recording.name)
		);
		const rules = { ...DEFAULT_RULES, density: { ...DEFAULT_RULES.density, everyS: 0 } };
		const robots = observers.map(({ robot }) => robot);
		const context = createVenueContext(RECORDINGS.key, [stored!.floor], robots, rules);
		let state = createVenueState(context);

		const epoch = 1_790_000_000_000;
		let pending: Observation[] = [];
		let instant = -1;
		let clockMs = epoch;
		let received = 0;
		const refused: string[] = [];
		const step = () => {
			const result = stepVenue(context, state, pending, clockMs / 1000);
			state = result.state;
			take((clockMs - epoch) / 1000, result.frames[0]!);
			pending = [];
		};
		const intake = createIntake({
			robots: () => true,
			rejected: { record: ({ detail }) => refused.push(detail) },
			onObservation: (_venue, observation) => pending.push(observation)
		});
		const reader = await signIn(SERVICE.username, SERVICE.password);
		await reader.subscribeAsync(`elbowroom/v1/${RECORDINGS.key}/+/+`, { qos: 1 });
		reader.on('message', (topic, payload, { retain }) => {
			received += 1;
			if (retain) return;
			const { t } = JSON.parse(payload.toString()) as { t: number };
			if (instant >= 0 && t !== instant) step();
			instant = t;
			clockMs = t;
			intake.take(topic, payload, false, t);
		});

		const sent = await publishAll(observers, recording, passwords, epoch);
		await until(() => received >= sent, `all ${sent} messages`);
		step();
		await reader.endAsync();
		expect(refused).toEqual([]);
	}

	const signIn = (username: string, password: string): Promise<MqttClient> =>
		mqtt.connectAsync(url, { protocolVersion: 4, clientId: username, username, password, reconnectPeriod: 0 });

	/** In order of time over all observers, so that one instant is together; each waits for its acknowledgement window. */
	async function publishAll(
		observers: readonly Observer[],
		recording: Recording,
		passwords: Readonly<Passwords>,
		epoch: number
	): Promise<number> {
		const clients = await Promise.all(
			observers.map(({ robot }) =>
				until(
					() => signIn(`${RECORDINGS.key}/${robot.key}`, passwords[robot.key]!).catch(() => null),
					'the observer to be let in'
				)
			)
		);
		const queue: { readonly client: number; readonly timed: Timed }[] = observers
			.flatMap((observer, client) => timelineOf(recording, observer).map((timed) => ({ client, timed })))
			.sort((a, b) => a.timed.at - b.timed.at);
		let seq = 0;
		for (const { client, timed } of queue) {
			seq += 1;
			const { robot } = observers[client]!;
			const body = JSON.stringify({ t: epoch + Math.round(timed.at * 1000), seq, ...timed.message });
			const { retain } = CHANNELS[timed.channel];
			const topic = robotTopic(RECORDINGS.key, robot.key, timed.channel);
			// Quality of service 1 throughout: a lost frame would be a frame not checked.
			await clients[client]!.publishAsync(topic, body, { qos: 1, retain });
		}
		await Promise.all(clients.map((client) => client.endAsync()));
		return queue.length;
	}

	for (const name of NAMES) {
		for (const [count, turned] of [
			[1, false],
			[3, true]
		] as const) {
			const who = count === 1 ? 'one observer' : `${count} observers with overlapping views and a turned map`;
			it(`${name}, seen by ${who}, equals the reference`, { timeout: 180_000 }, async () => {
				const { frames } = JSON.parse(readFileSync(join(DATA, `voronoi_${name}.json`), 'utf8')) as Reference;
				const path = join(DATA, `${name}.csv.gz`);
				const recording = readRecording(path);
				const [zone] = floorOf(recording, readSurvey(path, recording.name)).zones;
				const disturbed = disturbedInstants(recording, zone!);
				const wanted = new Map(
					frames.map((frame) => [Math.round(frame.t_s * 1000), frame] as const).filter(([t]) => !disturbed.has(t))
				);
				expect(wanted.size).toBeGreaterThan(0.75 * frames.length);
				let checked = 0;
				const wrong: string[] = [];
				await play(name, count, turned, (t, frame) => {
					const reference = wanted.get(Math.round(t * 1000));
					if (!reference) return;
					checked += 1;
					const zone = frame.zones[0]!;
					const off = describeDifference(zone, reference);
					if (off) wrong.push(`t ${t}: ${off}`);
				});
				expect(checked).toBe(wanted.size);
				expect(wrong).toEqual([]);
			});
		}
	}
});

/** s and m: how long the tracker doubts a person who is gone, and how far from the zone that can matter (two cut-offs). */
const DOUBT_S = DEFAULT_RULES.tracker.missedFor + 0.5;
const MATTERS_M = 2 * DEFAULT_RULES.density.cutoffRadiusM;

/**
 * Instants at which somebody in or near the zone has just turned up (not seen at the instant before) or has just gone (seen
 * within the time the tracker still doubts it). Annotations begin and end in the middle of the floor; people do not.
 */
function disturbedInstants({ frames }: Recording, { polygon }: Zone): Set<number> {
	const { minX, minY, maxX, maxY } = boundsOf(polygon);
	const matters = ({ x, y }: { x: number; y: number }) =>
		x > minX - MATTERS_M && x < maxX + MATTERS_M && y > minY - MATTERS_M && y < maxY + MATTERS_M;
	const lastSeen = new Map<string, { time: number; x: number; y: number }>();
	const instants = new Set<number>();
	let before = -Infinity;
	for (const { time, people } of frames) {
		const present = new Set(people.map(({ id }) => id));
		const arrived = people.some((person) => matters(person) && lastSeen.get(person.id)?.time !== before);
		const gone = [...lastSeen].some(([id, last]) => !present.has(id) && time - last.time < DOUBT_S && matters(last));
		if (arrived || gone) instants.add(Math.round(time * 1000));
		for (const { id, x, y } of people) lastSeen.set(id, { time, x, y });
		before = time;
	}
	return instants;
}

function describeDifference(
	zone: Frame['zones'][number],
	{ n, classic, voronoi_cutoff, on_edge }: Reference['frames'][number]
): string | null {
	if (!(zone.coverage > 1 - 1e-9)) return `coverage ${zone.coverage}`;
	const area = n > 0 ? n / classic : zone.observedArea;
	const near = (value: number | null, wanted: number, abs: number) => value !== null && Math.abs(value - wanted) <= abs;
	// Whoever stands exactly on the border may be in or out.
	const counts = on_edge ? [n, n - 1] : [n];
	if (!counts.some((count) => near(zone.classic, count / area, 1e-6)))
		return `classic ${zone.classic}, expected ${classic}`;
	if (!near(zone.density, voronoi_cutoff, 0.03 * voronoi_cutoff + REFERENCE_ROUNDING)) {
		return `Voronoi ${zone.density}, expected ${voronoi_cutoff}`;
	}
	return null;
}
