/** One SQLite connection, set up the same way wherever it is opened. */

import Sqlite from 'better-sqlite3';
import { CompiledQuery, Kysely, SqliteDialect, SqliteDriver, type DatabaseConnection } from 'kysely';
import { mkdirSync } from 'node:fs';
import { dirname } from 'node:path';
import { Failure } from '../../domain/failure.ts';
import { storageFailure } from './failures.ts';
import type { Database } from './schema.ts';

/** Earlier versions can corrupt a write-ahead log that several connections use (sqlite.org, "WAL reset", fixed in 3.51.3). */
const LEAST_SQLITE = '3.51.3';

export interface OpenDatabase {
	readonly db: Kysely<Database>;
	/** The connection below `db`, for bulk inserts and backups. Never use it while a transaction of `db` is open. */
	readonly raw: Sqlite.Database;
	close(): Promise<void>;
}

export interface OpenOptions {
	/** Reads only; the file must exist. */
	readonly readonly?: boolean;
	/**
	 * ms one statement may wait for another writer. The whole thread stands still meanwhile, so it is short and
	 * `writeTransaction` retries instead.
	 */
	readonly timeoutMs?: number;
}

/**
 * Opens the database at `path` (created with its folder when missing; `:memory:` for tests).
 *
 * Write-ahead log, foreign keys on, and `synchronous = FULL`: alarms, acknowledgements and the audit trail must
 * survive a power cut, and the bulky writers commit batches of a second or more, so the sync per commit costs little.
 * Transactions begin IMMEDIATE, hence never fail half-way for want of the write lock.
 *
 * @throws Failure 'storage' when the file cannot be opened or SQLite is too old
 */
export function openDatabase(path: string, { readonly = false, timeoutMs = 10 }: OpenOptions = {}): OpenDatabase {
	try {
		if (path !== ':memory:' && !readonly) mkdirSync(dirname(path), { recursive: true });
		const raw = new Sqlite(path, { readonly, timeout: timeoutMs });
		try {
			checkSqliteVersion(raw);
			raw.pragma('foreign_keys = ON');
			if (!readonly) {
				raw.pragma('journal_mode = WAL');
				raw.pragma('synchronous = FULL');
			}
		} catch (cause) {
			raw.close();
			throw cause;
		}
		const db = new Kysely<Database>({ dialect: new ImmediateDialect(raw, readonly) });
		return { db, raw, close: () => db.destroy() };
	} catch (cause) {
		throw storageFailure(cause, `The database ${path} cannot be opened`) ?? cause;
	}
}

function checkSqliteVersion(raw: Sqlite.Database): void {
	const version = String(raw.prepare('SELECT sqlite_version()').pluck().get());
	if (isOlder(version, LEAST_SQLITE)) {
		throw new Failure(
			'storage',
			`SQLite ${version} is too old: versions before ${LEAST_SQLITE} can damage the database. Reinstall better-sqlite3.`
		);
	}
}

/** Compares dotted versions number by number. */
export function isOlder(version: string, least: string): boolean {
	const [have, need] = [version, least].map((text) => text.split('.').map(Number)) as [number[], number[]];
	for (let i = 0; i < need.length; i++) {
		const difference = (have[i] ?? 0) - (need[i] ?? 0);
		if (difference !== 0) return difference < 0;
	}
	return false;
}

class ImmediateDialect extends SqliteDialect {
	readonly #raw: Sqlite.Database;
	readonly #readonly: boolean;

	constructor(raw: Sqlite.Database, readonly: boolean) {
		super({ database: raw });
		this.#raw = raw;
		this.#readonly = readonly;
	}

	override createDriver(): SqliteDriver {
		return new ImmediateDriver(this.#raw, this.#readonly);
	}
}

class ImmediateDriver extends SqliteDriver {
	readonly #raw: Sqlite.Database;
	readonly #begin: string;

	constructor(raw: Sqlite.Database, readonly: boolean) {
		super({ database: raw });
		this.#raw = raw;
		this.#begin = readonly ? 'begin' : 'begin immediate';
	}

	override async beginTransaction(connection: DatabaseConnection): Promise<void> {
		await connection.executeQuery(CompiledQuery.raw(this.#begin));
	}

	/** SQLite rolls back by itself on a full disk; a second rollback would hide the real error. */
	override async rollbackTransaction(connection: DatabaseConnection): Promise<void> {
		if (this.#raw.inTransaction) await super.rollbackTransaction(connection);
	}
}
