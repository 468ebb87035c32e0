/** `npm run replay`: recorded people and robots, played through MQTT as robots would have sent them. */

import { parseArgs } from 'node:util';
import { Failure } from '../src/lib/domain/failure.ts';
import type { Floor } from '../src/lib/domain/floor.ts';
import { openDatabase } from '../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../src/lib/server/db/migrate.ts';
import { ensureCredentials, provisionVenue, readPasswords, writePasswords } from './provision.ts';
import { floorOf, readSurvey, RECORDINGS } from './recordings/floor.ts';
import { observersOf, type Observer } from './recordings/observers.ts';
import { readRecording, type Recording } from './recordings/parse.ts';
import { playRecording } from './recordings/play.ts';

const HELP = `Usage: npm run replay -- FILE… [options]
  FILE                 NAME.csv.gz (people), NAME.robot.csv.gz (a robot and the people beside it), NAME.jsonl.gz (a robot's view)
  --robots N           standing observers that share the view of a people file (1)
  --speed X            recorded seconds per second (1)
  --turned             observers use a map that is turned and shifted against the floor
  --loop               start again at the end
  --url URL            broker; else MQTT_URL, else mqtt://127.0.0.1:1883
  --credentials FILE   where the observers' passwords are kept (data/recording-robots.json)
  --prepare            only add floors, observers and credentials to the database
The database is DATABASE_PATH, else data/elbowroom.db.`;

interface Job {
	readonly recording: Recording;
	readonly floor: Floor;
	readonly observers: readonly Observer[];
}

function readOptions() {
	const { values, positionals } = parseArgs({
		allowPositionals: true,
		options: {
			robots: { type: 'string', default: '1' },
			speed: { type: 'string', default: '1' },
			turned: { type: 'boolean', default: false },
			loop: { type: 'boolean', default: false },
			url: { type: 'string', default: process.env.MQTT_URL || 'mqtt://127.0.0.1:1883' },
			credentials: { type: 'string', default: 'data/recording-robots.json' },
			prepare: { type: 'boolean', default: false },
			help: { type: 'boolean', default: false }
		}
	});
	const robots = Number(values.robots);
	const speed = Number(values.speed);
	if (!Number.isInteger(robots) || robots < 1 || robots > 50)
		throw new Failure('bad_input', '--robots must be from 1 to 50.');
	if (!(speed >= 0.1 && speed <= 20)) throw new Failure('bad_input', '--speed must be from 0.1 to 20.');
	if (positionals.length === 0 && !values.help) throw new Failure('bad_input', HELP);
	return { ...values, robots, speed, files: positionals };
}

async function prepare(jobs: readonly Job[], credentials: string) {
	const { db, close } = openDatabase(process.env.DATABASE_PATH || 'data/elbowroom.db', { timeoutMs: 2000 });
	try {
		await migrateToLatest(db);
		const robots = jobs.flatMap(({ observers }) => observers.map(({ robot }) => robot));
		const plan = { venue: RECORDINGS, floors: jobs.map(({ floor }) => floor), robots, nowMs: Date.now() };
		const { venueId, added } = await provisionVenue(db, plan);
		const known = readPasswords(credentials);
		const keys = robots.map(({ key }) => key);
		const made = await ensureCredentials(db, venueId, keys, known, Date.now());
		const passwords = { ...known, ...made.passwords };
		writePasswords(credentials, passwords);
		return { passwords, changed: added + made.added > 0 };
	} finally {
		await close();
	}
}

async function main(): Promise<void> {
	const options = readOptions();
	if (options.help) return console.log(HELP);
	const jobs = options.files.map((file): Job => {
		const recording = readRecording(file);
		if (recording.frames.length === 0) throw new Failure('bad_input', `${file}: nobody in it.`);
		const floor = floorOf(recording, readSurvey(file, recording.name));
		return { recording, floor, observers: observersOf(recording, floor, options.robots, options.turned) };
	});
	const { passwords, changed } = await prepare(jobs, options.credentials);
	if (changed) {
		console.log(
			'New floors or observers were added to the database. A desk that is running knows them after a restart.'
		);
	}
	if (options.prepare) return;
	const stop = new AbortController();
	for (const signal of ['SIGINT', 'SIGTERM'] as const) process.on(signal, () => stop.abort());
	await Promise.all(
		jobs.map(async ({ recording, observers }) => {
			const first = recording.frames[0]!.people.length;
			console.log(
				`${recording.name}: ${recording.frames.length} instants, ${observers.length} observer(s), ${first} people at the start.`
			);
			const { url, speed, loop } = options;
			const onTrouble = (message: string) => console.error(message);
			const played = await playRecording({
				recording,
				observers,
				url,
				passwords,
				speed,
				loop,
				signal: stop.signal,
				onTrouble
			});
			console.log(`${recording.name}: ${played.messages} messages sent, ${played.looks} looks.`);
		})
	);
}

try {
	await main();
} catch (cause) {
	console.error(cause instanceof Failure ? cause.message : cause);
	process.exitCode = 1;
}
