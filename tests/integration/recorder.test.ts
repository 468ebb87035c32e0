import pino from 'pino';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { LiveAlarm } from '../../src/lib/contracts/live.ts';
import type { OpenHalt } from '../../src/lib/domain/engine/robot-view.ts';
import { openDatabase } from '../../src/lib/server/db/connection.ts';
import { startRecorder, type Recorder } from '../../src/lib/server/engine/recorder.ts';
import { readSites, type Site } from '../../src/lib/server/engine/site.ts';
import { until } from '../support/brokers.ts';
import { fileDatabase, insertSite } from '../support/database.ts';

const log = pino({ level: 'silent' });
let database: Awaited<ReturnType<typeof fileDatabase>>;
let site: Site;
let recorder: Recorder;
let alarms: LiveAlarm[];

beforeEach(async () => {
	database = await fileDatabase();
	await insertSite(database.db);
	[site] = (await readSites(database.db, [])) as [Site];
	alarms = [];
	recorder = startRecorder({ db: database.db, log, onAlarm: (alarm) => alarms.push(alarm), retryMs: 20 });
});

afterEach(async () => {
	await recorder.stop();
	await database.remove();
});

const ONSET = 1_790_000_000;

const halt = (robot: string, change: Partial<OpenHalt> = {}): OpenHalt => ({
	incident: `quay.${robot}.${ONSET * 1000}`,
	robot,
	kind: 'freeze',
	verdict: 'packed',
	onset: ONSET,
	detectedAt: ONSET + 8,
	x: 2,
	y: 3,
	heading: 0.5,
	zone: 'hall',
	causeGroup: 'cause-1',
	before: null,
	at: null,
	taskId: 'job',
	software: '1.0.0',
	...change
});
const started = (robot: string, change: Partial<OpenHalt> = {}) =>
	({ type: 'halt_started', floor: 'quay-ground', halt: halt(robot, change) }) as const;
const ended = (robot: string, at: number) =>
	({ type: 'halt_ended', floor: 'quay-ground', halt: halt(robot), at, reason: 'progress' }) as const;

const incidents = () => database.db.selectFrom('incident').selectAll().orderBy('id').execute();
const storedAlarms = () => database.db.selectFrom('alarm').selectAll().execute();

it('three robots of one cause make three incidents and one alarm that names them', async () => {
	for (const robot of ['porter-1', 'porter-2', 'porter-3']) recorder.record(site, started(robot));
	await recorder.settle();
	expect(await incidents()).toHaveLength(3);
	expect(await storedAlarms()).toHaveLength(1);
	expect(alarms.at(-1)?.robots).toEqual(['porter-1', 'porter-2', 'porter-3']);
});

it('the alarm returns only when the last of its robots gets on', async () => {
	recorder.record(site, started('porter-1'));
	recorder.record(site, started('porter-2'));
	recorder.record(site, ended('porter-1', ONSET + 30));
	await recorder.settle();
	expect(alarms.at(-1)?.state).toBe('unacknowledged');
	recorder.record(site, ended('porter-2', ONSET + 40));
	await recorder.settle();
	expect(alarms.at(-1)).toMatchObject({ state: 'returned', returned_at_ms: (ONSET + 40) * 1000 });
	expect((await incidents()).every((row) => row.ended_ms !== null)).toBe(true);
});

it('writing the same halt again, as after a crash, changes nothing', async () => {
	recorder.record(site, started('porter-1'));
	recorder.record(site, started('porter-1'));
	await recorder.settle();
	expect(await incidents()).toHaveLength(1);
	expect(await storedAlarms()).toHaveLength(1);
});

it('a halt that turns out worse makes its alarm more urgent', async () => {
	recorder.record(site, started('porter-1'));
	await recorder.settle();
	expect(alarms.at(-1)?.priority).toBe('medium');
	const worse = halt('porter-1', { kind: 'fault' });
	recorder.record(site, { type: 'halt_changed', floor: 'quay-ground', halt: worse, was: 'freeze', at: ONSET + 20 });
	await recorder.settle();
	expect(alarms.at(-1)).toMatchObject({ priority: 'high', type: 'fault' });
	expect((await incidents())[0]?.kind).toBe('fault');
});

describe('when the database refuses', () => {
	it('a locked file loses nothing: the trouble is said, and the halt stored once the lock is gone', async () => {
		const other = openDatabase(database.path);
		other.raw.exec('BEGIN IMMEDIATE');
		recorder.record(site, started('porter-1'));
		await until(() => recorder.trouble(), 'word of the trouble');
		expect(recorder.trouble()).toMatch(/kept in memory/);
		expect(alarms).toEqual([]);
		other.raw.exec('ROLLBACK');
		await other.close();
		await until(() => alarms.length > 0, 'the alarm');
		expect(recorder.trouble()).toBeNull();
		expect(await incidents()).toHaveLength(1);
	});

	it('a full disk loses nothing either', async () => {
		const pages = database.raw.pragma('page_count', { simple: true }) as number;
		database.raw.pragma(`max_page_count = ${pages}`);
		// Rows until no page is left, as on a disk that fills up.
		const fill = database.raw.prepare(`INSERT INTO setting (key, value) VALUES (?, json_quote(?))`);
		expect(() => {
			for (let i = 0; ; i++) fill.run(`filler-${i}`, 'x'.repeat(2000));
		}).toThrow(/full/);
		for (let i = 1; i <= 3; i++) recorder.record(site, started(`porter-${i}`, { taskId: 'j'.repeat(4000) }));
		await until(() => recorder.trouble(), 'word of the trouble');
		expect(recorder.trouble()).toMatch(/full/i);
		database.raw.pragma('max_page_count = 1000000');
		await until(() => alarms.length > 0, 'the alarm');
		expect(await incidents()).toHaveLength(3);
	});

	it('a write that can never succeed does not hold up the others', async () => {
		recorder.record(site, started('porter-1', { kind: 'no such kind' as OpenHalt['kind'] }));
		recorder.record(site, started('porter-2'));
		await recorder.settle();
		expect((await incidents()).map(({ robot_id }) => robot_id)).toEqual([site.robotIds.get('porter-2')]);
	});
});

it('two parts of a minute add up, and the mean is weighted by what each part observed', async () => {
	const minute = 1_790_000_040;
	const part = (mean: number | null, observedAreaS: number) =>
		({
			type: 'minutes',
			floor: 'quay-ground',
			density: [{ zone: 'hall', minute, mean, peak: mean, coverage: 0.5, observedAreaS, personS: 10 }],
			exposure: [
				{ robot: 'porter-1', zone: 'hall', minute, band: '0.2-0.5', taskedS: 20, movingS: 15, distance: 12, halts: 1 }
			]
		}) as const;
	recorder.record(site, part(1, 300));
	recorder.record(site, part(2, 100));
	recorder.record(site, part(null, 0));
	await recorder.settle();
	const density = await database.db.selectFrom('density_minute').selectAll().execute();
	expect(density).toEqual([
		expect.objectContaining({ mean_per_m2: 1.25, peak_per_m2: 2, observed_m2_s: 400, person_s: 30 })
	]);
	const exposure = await database.db.selectFrom('exposure_minute').selectAll().execute();
	expect(exposure).toEqual([expect.objectContaining({ tasked_s: 60, moving_s: 45, distance_m: 36, halts: 3 })]);
});

it('hands back after a restart what was open, with its evidence', async () => {
	const moment = {
		time: ONSET,
		density: 1.2,
		coverage: 0.8,
		personsWithin2m: 4,
		nearestPerson: 0.9,
		roomAlone: 0,
		roomShared: 0.4,
		limitedByPeople: true,
		observedShare: 0.7,
		flexibility: 0.3,
		verdict: 'shared'
	} as const;
	recorder.record(site, started('porter-1', { before: moment, at: moment, verdict: 'shared' }));
	await recorder.settle();
	const [again] = (await readSites(database.db, [])) as [Site];
	expect(again.openHalts.get('quay-ground')).toEqual([
		halt('porter-1', { before: moment, at: moment, verdict: 'shared' })
	]);
});
