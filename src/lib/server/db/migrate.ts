/** Brings a database to the schema this version of the code knows. */

import { Migrator, sql, type Kysely } from 'kysely';
import { migrations } from '../../../../migrations/index.ts';
import { Failure } from '../../domain/failure.ts';
import { storageFailure } from './failures.ts';
import type { Database } from './schema.ts';

const TABLE = 'kysely_migration';

/**
 * Applies the migrations that are missing and returns their names; each runs wholly or not at all.
 *
 * @throws Failure 'storage' when the database comes from a newer version, cannot be written, or a migration fails
 */
export async function migrateToLatest(db: Kysely<Database>): Promise<string[]> {
	await refuseNewer(db);
	const migrator = new Migrator({
		db,
		migrationTableName: TABLE,
		provider: { getMigrations: async () => ({ ...migrations }) }
	});
	const { error, results = [] } = await migrator.migrateToLatest();
	if (error === undefined) return results.map(({ migrationName }) => migrationName);
	const failed = results.find(({ status }) => status === 'Error')?.migrationName ?? 'the first step';
	throw (
		storageFailure(error) ??
		new Failure('storage', `The database could not be brought up to date (${failed}).`, undefined, { cause: error })
	);
}

async function refuseNewer(db: Kysely<Database>): Promise<void> {
	const applied = await appliedMigrations(db);
	const unknown = applied.filter((name) => !Object.hasOwn(migrations, name));
	if (unknown.length > 0) {
		throw new Failure(
			'storage',
			`This database was written by a newer version (${unknown.join(', ')}). Start that version, or restore a backup.`
		);
	}
}

/** Names of the migrations the database has, oldest first; empty for a new database. */
export async function appliedMigrations(db: Kysely<Database>): Promise<string[]> {
	try {
		const tables = await sql<{ name: string }>`SELECT name FROM sqlite_schema WHERE name = ${TABLE}`.execute(db);
		if (tables.rows.length === 0) return [];
		const { rows } = await sql<{ name: string }>`SELECT name FROM ${sql.table(TABLE)} ORDER BY name`.execute(db);
		return rows.map(({ name }) => name);
	} catch (cause) {
		throw storageFailure(cause) ?? cause;
	}
}
