import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import pino from 'pino';
import { afterEach, beforeEach, expect, it } from 'vitest';
import { openDatabase, type OpenDatabase } from '../db/connection.ts';
import { migrateToLatest } from '../db/migrate.ts';
import { KEPT_MESSAGES, startRejectedLog, type RejectedLog } from './rejected.ts';

const DAY_MS = 86_400_000;
const T = 20_000 * DAY_MS;
const SCHEMA = { reason: 'schema', robot: 'porter-01', detail: 'x: expected number' } as const;

let folder = '';
let database: OpenDatabase;
let log: RejectedLog;

beforeEach(async () => {
	folder = await mkdtemp(join(tmpdir(), 'rejected-'));
	database = openDatabase(join(folder, 'test.db'), { timeoutMs: 1 });
	await migrateToLatest(database.db);
	log = startRejectedLog({ db: database.db, log: pino({ level: 'silent' }), flushEveryMs: 3_600_000 });
});
afterEach(async () => {
	await log.stop();
	await database.close();
	await rm(folder, { recursive: true, force: true });
});

const messages = () => database.db.selectFrom('rejected_message').selectAll().orderBy('id').execute();
const counts = () => database.db.selectFrom('rejected_count').selectAll().orderBy('day_ms').execute();

it('stores payloads as they came, cut to 512 bytes, with their whole size', async () => {
	const payload = Buffer.from(Array.from({ length: 600 }, (_, i) => i % 256));
	log.record(SCHEMA, 'elbowroom/v1/saltmarsh/porter-01/pose', payload, T);
	payload.fill(0);
	await log.flush();
	const [row] = await messages();
	expect(row).toMatchObject({ at_ms: T, robot: 'porter-01', reason: 'schema', size_bytes: 600 });
	expect([...(row?.payload ?? [])]).toEqual(Array.from({ length: 512 }, (_, i) => i % 256));
});

it('adds up counts per reason, robot and day over several flushes', async () => {
	for (const atMs of [T, T + 1, T + DAY_MS]) log.record(SCHEMA, 'topic', Buffer.alloc(0), atMs);
	await log.flush();
	log.record(SCHEMA, 'topic', Buffer.alloc(0), T);
	log.record({ reason: 'unknown_topic', robot: null, detail: 'x' }, 'topic', Buffer.alloc(0), T);
	await log.flush();
	expect(await counts()).toEqual([
		{ reason: 'schema', robot: 'porter-01', day_ms: T, count: 3 },
		{ reason: 'unknown_topic', robot: '', day_ms: T, count: 1 },
		{ reason: 'schema', robot: 'porter-01', day_ms: T + DAY_MS, count: 1 }
	]);
	expect(log.total()).toBe(5);
	expect(Object.fromEntries(log.byReason())).toEqual({ schema: 4, unknown_topic: 1 });
});

it('keeps the latest thousand and counts all, in memory and in the table', async () => {
	const send = (from: number, to: number) => {
		for (let i = from; i < to; i++) log.record(SCHEMA, `topic ${i}`, Buffer.alloc(0), T);
	};
	send(0, 5000);
	await log.flush();
	expect((await messages())[0]?.topic).toBe(`topic ${5000 - KEPT_MESSAGES}`);
	send(5000, 5010);
	await log.flush();
	const rows = await messages();
	expect(rows).toHaveLength(KEPT_MESSAGES);
	expect(rows[0]?.topic).toBe(`topic ${5010 - KEPT_MESSAGES}`);
	expect(rows[KEPT_MESSAGES - 1]?.topic).toBe('topic 5009');
	expect((await counts())[0]?.count).toBe(5010);
});

it('loses no count while the database is locked, and stores all once it is free', async () => {
	const other = openDatabase(join(folder, 'test.db'));
	other.raw.exec('BEGIN IMMEDIATE');
	for (let i = 0; i < 3000; i++) log.record(SCHEMA, `topic ${i}`, Buffer.alloc(0), T);
	await log.flush();
	for (let i = 3000; i < 3500; i++) log.record(SCHEMA, `topic ${i}`, Buffer.alloc(0), T);
	await log.flush();
	expect(await messages()).toEqual([]);

	other.raw.exec('ROLLBACK');
	await other.close();
	await log.flush();
	const rows = await messages();
	expect(rows).toHaveLength(KEPT_MESSAGES);
	expect(rows[KEPT_MESSAGES - 1]?.topic).toBe('topic 3499');
	expect((await counts())[0]?.count).toBe(3500);
});

it('never throws, even with a database that is gone', async () => {
	await database.close();
	log.record(SCHEMA, 'topic', Buffer.alloc(0), T);
	await expect(log.flush()).resolves.toBeUndefined();
	await expect(log.stop()).resolves.toBeUndefined();
	expect(log.total()).toBe(1);
	database = openDatabase(':memory:');
});

it('repairs a topic SQLite could not hold and cuts a long one', async () => {
	log.record(SCHEMA, `\ud800${'x'.repeat(60_000)}`, Buffer.alloc(0), T);
	await log.flush();
	const [row] = await messages();
	expect(row?.topic).toBe(`\ufffd${'x'.repeat(511)}`);
});
