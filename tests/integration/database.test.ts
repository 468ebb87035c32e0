/** The database on a real file: what it refuses, and what happens when it cannot be written. */

import { sql } from 'kysely';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { migrations } from '../../migrations/index.ts';
import { Failure } from '../../src/lib/domain/failure.ts';
import { openDatabase } from '../../src/lib/server/db/connection.ts';
import { appliedMigrations, migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import type { NewRow } from '../../src/lib/server/db/schema.ts';
import { writeTransaction } from '../../src/lib/server/db/transaction.ts';
import { readFloor, readFloors } from '../../src/lib/server/repositories/floors.ts';
import { readRobots } from '../../src/lib/server/repositories/robots.ts';
import { fileDatabase, insertSite, T0 } from '../support/database.ts';

let open: Awaited<ReturnType<typeof fileDatabase>>;
beforeEach(async () => void (open = await fileDatabase()));
afterEach(() => open.remove());

const setting = (key: string): NewRow<'setting'> => ({ key, value: '1' });
const write = (key: string) =>
	writeTransaction(open.db, (trx) => trx.insertInto('setting').values(setting(key)).execute());
const settings = () => open.raw.prepare('SELECT key FROM setting ORDER BY key').pluck().all();

describe('migrations', () => {
	it('are applied once, in order, and then known', async () => {
		expect(await appliedMigrations(open.db)).toEqual(Object.keys(migrations));
		expect(await migrateToLatest(open.db)).toEqual([]);
	});

	it('make STRICT tables only', () => {
		const lax = open.raw
			.prepare(
				`SELECT name FROM pragma_table_list
				 WHERE type = 'table' AND strict = 0 AND name NOT LIKE 'sqlite_%' AND name NOT LIKE 'kysely_%'`
			)
			.pluck()
			.all();
		expect(lax).toEqual([]);
	});

	it('refuse a database of a newer version and leave it alone', async () => {
		open.raw.prepare(`INSERT INTO kysely_migration VALUES ('0999_far_ahead', '2031-01-01T00:00:00Z')`).run();
		const refusal = await migrateToLatest(open.db).catch((cause: unknown) => cause);
		expect(refusal).toBeInstanceOf(Failure);
		expect(refusal).toMatchObject({
			code: 'storage',
			message: expect.stringMatching(/written by a newer version \(0999_far_ahead\)/)
		});
	});
});

describe('tables', () => {
	it('refuse a value of the wrong type', async () => {
		const site = await insertSite(open.db);
		const insert = open.raw.prepare(
			`INSERT INTO density_minute VALUES (${site.floorId}, ${site.zoneId}, ?, 1.5, 2, 0.5, 10, 5)`
		);
		expect(() => insert.run('noon')).toThrow(/cannot store TEXT value in INTEGER column/);
		expect(() => insert.run(60_000.5)).toThrow(/cannot store REAL value in INTEGER column/);
	});

	it('refuse NaN where a number is required: SQLite would store it as NULL', async () => {
		const { floorId, zoneId } = await insertSite(open.db);
		const row = { floor_id: floorId, zone_id: zoneId, minute_ms: 0, mean_per_m2: null, peak_per_m2: null };
		const insert = open.db
			.insertInto('density_minute')
			.values({ ...row, coverage: NaN, observed_m2_s: 0, person_s: 0 })
			.execute();
		await expect(insert).rejects.toThrow(/NOT NULL/);
	});

	it('refuse words that are not in a list, JSON that is none, and rows that point nowhere', () => {
		const run = (text: string) => () => open.raw.prepare(text).run();
		const user = (role: string) => `INSERT INTO user VALUES ('1', 'a@example.org', 'A', '${role}', 'x', 0, NULL)`;
		expect(run(user('emperor'))).toThrow(/CHECK/);
		expect(run(`INSERT INTO setting VALUES ('a', '{')`)).toThrow(/CHECK/);
		expect(run(`INSERT INTO session VALUES ('${'0'.repeat(64)}', 'nobody', 0, 0)`)).toThrow(/FOREIGN KEY/);
		expect(run(`INSERT INTO session VALUES ('a readable token', 'nobody', 0, 0)`)).toThrow(/CHECK/);
	});

	it('know a mail address by any capitals', () => {
		const insert = open.raw.prepare(`INSERT INTO user VALUES (?, ?, 'A', 'admin', 'x', 0, NULL)`);
		insert.run('1', 'ada@example.org');
		expect(() => insert.run('2', 'Ada@Example.org')).toThrow(/UNIQUE/);
	});

	it('give a floor back as it was stored', async () => {
		await insertSite(open.db);
		const stored = await readFloor(open.db, 'quay-ground');
		expect(stored?.floor).toMatchObject({
			key: 'quay-ground',
			walls: [{ ax: 5, ay: 0, bx: 5, by: 4 }],
			edgesBlockSight: true,
			zones: [{ key: 'hall', scheme: 'fruin_walkway', threshold: 1.5, private: false }],
			waitingPlaces: [{ x: 1, y: 1, radius: 0.5 }],
			maps: { 'robot-map': { scale: 1, rotation: 0.5, tx: 3, ty: -2 } }
		});
		expect(stored?.labels).toEqual([{ text: 'Door', x: 0, y: 5 }]);
		expect(stored?.venue.time_zone).toBe('Europe/London');
		expect(await readFloors(open.db, ['elsewhere'])).toEqual([]);
		expect((await readRobots(open.db, ['quay'])).map(({ robot }) => robot.key)).toEqual([
			'porter-1',
			'porter-2',
			'porter-3'
		]);
	});

	it('say which drawing is unreadable', async () => {
		await insertSite(open.db);
		open.raw.prepare(`UPDATE zone SET polygon = '{"outer": []}'`).run();
		await expect(readFloor(open.db, 'quay-ground')).rejects.toThrow(/unreadable: the outline of zone hall/);
	});
});

describe('a long list', () => {
	it.each([
		['incidents', `SELECT * FROM incident ORDER BY onset_ms DESC, id DESC LIMIT 50`],
		['incidents of a floor', `SELECT * FROM incident WHERE floor_id = 1 ORDER BY onset_ms DESC, id DESC LIMIT 50`],
		['open incidents', `SELECT * FROM incident WHERE ended_ms IS NULL ORDER BY onset_ms DESC, id DESC LIMIT 50`],
		['alarms', `SELECT * FROM alarm ORDER BY raised_at_ms DESC, id DESC LIMIT 50`],
		['exposure of a week', `SELECT sum(tasked_s) FROM exposure_minute WHERE minute_ms BETWEEN 0 AND 604800000`],
		['density of a zone', `SELECT * FROM density_minute WHERE zone_id = 1 AND minute_ms > 0`]
	])('of %s is read along an index, without sorting', (_name, query) => {
		const plan = open.raw
			.prepare(`EXPLAIN QUERY PLAN ${query}`)
			.all()
			.map((row) => (row as { detail: string }).detail)
			.join('; ');
		expect(plan).toMatch(/USING (COVERING )?INDEX|USING PRIMARY KEY/);
		expect(plan).not.toContain('TEMP B-TREE');
	});
});

describe('writing', () => {
	it('while another connection holds the lock fails in words, blocks nobody meanwhile, and works again afterwards', async () => {
		const other = openDatabase(open.path);
		other.raw.exec('BEGIN IMMEDIATE');
		let ticks = 0;
		const clock = setInterval(() => ticks++, 5);
		const refusal = await write('a').catch((cause: unknown) => cause);
		clearInterval(clock);
		expect(refusal).toMatchObject({ name: 'Failure', code: 'storage', message: expect.stringMatching(/busy/) });
		expect(ticks).toBeGreaterThan(3);

		other.raw.exec('ROLLBACK');
		await write('b');
		expect(settings()).toEqual(['b']);
		await other.close();
	});

	it('waits for a lock that is let go in time', async () => {
		const other = openDatabase(open.path);
		other.raw.exec('BEGIN IMMEDIATE');
		const written = write('a');
		setTimeout(() => other.raw.exec('COMMIT'), 100);
		await written;
		expect(settings()).toEqual(['a']);
		await other.close();
	});

	it('loses nothing when two connections read and write at once', async () => {
		// No waiting inside SQLite: in one thread the two would only hinder each other.
		open.raw.pragma('busy_timeout = 0');
		const other = openDatabase(open.path, { timeoutMs: 0 });
		open.raw.prepare(`INSERT INTO setting VALUES ('count', '0')`).run();
		const increment = ({ db }: Pick<typeof open, 'db'>) =>
			writeTransaction(db, async (trx) => {
				const { value } = await trx.selectFrom('setting').select('value').executeTakeFirstOrThrow();
				// Gives the other connection its turn between reading and writing.
				await new Promise(setImmediate);
				await trx
					.updateTable('setting')
					.set({ value: String(Number(value) + 1) })
					.execute();
			});
		await Promise.all([open, other].flatMap((side) => Array.from({ length: 20 }, () => increment(side))));
		expect(open.raw.prepare('SELECT value FROM setting').pluck().get()).toBe('40');
		await other.close();
	});

	it('is all or nothing', async () => {
		const work = writeTransaction(open.db, async (trx) => {
			await trx.insertInto('setting').values(setting('a')).execute();
			throw new Failure('conflict', 'no');
		});
		await expect(work).rejects.toThrow('no');
		expect(settings()).toEqual([]);
	});

	it('joins a transaction that is open already', async () => {
		const work = writeTransaction(open.db, async (outer) => {
			await writeTransaction(outer, (trx) => trx.insertInto('setting').values(setting('a')).execute());
			throw new Error('later');
		});
		await expect(work).rejects.toThrow('later');
		expect(settings()).toEqual([]);
	});

	it('says that the disk is full, and works again once there is room', async () => {
		const pages = Number(open.raw.pragma('page_count', { simple: true }));
		open.raw.pragma(`max_page_count = ${pages}`);
		const payload = Buffer.alloc(512);
		const fill = () =>
			writeTransaction(open.db, async (trx) => {
				for (let i = 0; i < 100; i++) {
					await trx
						.insertInto('rejected_message')
						.values({ at_ms: T0, topic: 'x', reason: 'schema', detail: '', payload, size_bytes: 512 })
						.execute();
				}
			});
		await expect(fill()).rejects.toMatchObject({ code: 'storage', message: expect.stringMatching(/disk is full/) });
		open.raw.pragma('max_page_count = 100000');
		await fill();
		expect(open.raw.prepare('SELECT count(*) FROM rejected_message').pluck().get()).toBe(100);
	});

	it('says that a read-only database is read-only, and reads it', async () => {
		await write('a');
		const reader = openDatabase(open.path, { readonly: true });
		expect(await reader.db.selectFrom('setting').select('key').execute()).toEqual([{ key: 'a' }]);
		const refused = writeTransaction(reader.db, (trx) => trx.insertInto('setting').values(setting('b')).execute());
		await expect(refused).rejects.toMatchObject({ code: 'storage', message: expect.stringMatching(/read-only/) });
		await reader.close();
	});

	it('leaves mistakes of ours what they are', async () => {
		await write('a');
		await expect(write('a')).rejects.toThrow(/UNIQUE/);
		await expect(write('a')).rejects.not.toBeInstanceOf(Failure);
	});
});

describe('opening', () => {
	it('sets up every connection: write-ahead log, every commit on the disk, foreign keys', () => {
		const pragma = (name: string) => open.raw.pragma(name, { simple: true });
		expect([pragma('journal_mode'), pragma('synchronous'), pragma('foreign_keys')]).toEqual(['wal', 2, 1]);
	});

	it('works in memory', async () => {
		const memory = openDatabase(':memory:');
		await migrateToLatest(memory.db);
		const { rows } = await sql<{ n: number }>`SELECT count(*) AS n FROM venue`.execute(memory.db);
		expect(rows).toEqual([{ n: 0 }]);
		await memory.close();
	});

	it('tells in words what is wrong with the file', () => {
		const folder = mkdtempSync(join(tmpdir(), 'elbowroom-'));
		const failureOf = (path: string, readonly = false) => {
			try {
				openDatabase(path, { readonly });
				return null;
			} catch (cause) {
				return cause;
			}
		};
		const text = join(folder, 'text.db');
		writeFileSync(
			text,
			'This is not a database, though it is long enough to be taken for the start of one. '.repeat(20)
		);
		expect(failureOf(text)).toMatchObject({
			code: 'storage',
			message: expect.stringMatching(/not an SQLite database/)
		});
		expect(failureOf(join(folder, 'none.db'), true)).toMatchObject({ code: 'storage' });
		expect(failureOf(join(text, 'below-a-file.db'))).toMatchObject({ code: 'storage' });
		rmSync(folder, { recursive: true });
	});
});
