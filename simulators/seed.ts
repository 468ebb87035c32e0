/** `npm run seed`: Saltmarsh Hall in the database, with accounts, credentials and eight past weeks. Running it again changes nothing. */

import { randomInt } from 'node:crypto';
import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import type { Kysely } from 'kysely';
import { createUser } from '../src/lib/server/auth/users.ts';
import { hashPassword, verifyPassword } from '../src/lib/server/auth/passwords.ts';
import { openDatabase } from '../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../src/lib/server/db/migrate.ts';
import type { Database, Role } from '../src/lib/server/db/schema.ts';
import { readUserByEmail } from '../src/lib/server/repositories/users.ts';
import { seedHistory } from './history/seed-history.ts';
import { ensureCredentials, provisionVenue, readPasswords, writePasswords } from './provision.ts';
import { fleetOf, SALTMARSH } from './venue/saltmarsh.ts';

/** Invented people, one per role. */
const ACCOUNTS: readonly { readonly role: Role; readonly name: string }[] = [
	{ role: 'operator', name: 'Control room' },
	{ role: 'maintainer', name: 'Robot workshop' },
	{ role: 'manager', name: 'House manager' },
	{ role: 'admin', name: 'Administration' },
	{ role: 'display', name: 'Wall screen' }
];
const mailOf = (role: Role): string => `${role}@example.org`;

const WORDS =
	'amber basin candle drift ember fathom gravel harbour inlet jetty kelp lantern marram narrow oyster pebble quay reed shingle tide'.split(
		' '
	);

export interface SeedOptions {
	readonly databasePath: string;
	readonly passwordsFile: string;
	/** Where the demo password is kept, so that the demo can print it again; beside the database. */
	readonly signInFile: string;
	/** Password of all demo accounts; made up when not given and none is kept. */
	readonly password: string | undefined;
	readonly nowMs: number;
	/** Whole past weeks of history, 8 unless told otherwise */
	readonly weeks?: number;
	readonly log: (line: string) => void;
}

/** Does what `npm run seed` does and returns the sign-ins; the password is null when nobody here knows it any more. */
export async function seed(options: SeedOptions): Promise<{ emails: readonly string[]; password: string | null }> {
	const { databasePath, passwordsFile, nowMs, log } = options;
	const { db, raw, close } = openDatabase(databasePath, { timeoutMs: 2000 });
	try {
		const applied = await migrateToLatest(db);
		if (applied.length > 0) log(`Database brought up to date: ${applied.join(', ')}.`);
		const fleet = fleetOf();
		const { venueId, added } = await provisionVenue(db, {
			venue: SALTMARSH.venue,
			floors: SALTMARSH.floors.map(({ floor }) => floor),
			robots: fleet,
			nowMs
		});
		if (added > 0) log(`${SALTMARSH.venue.name}: ${SALTMARSH.floors.length} floors, ${fleet.length} robots.`);
		const keys = fleet.map(({ key }) => key);
		const known = readPasswords(passwordsFile);
		const credentials = await ensureCredentials(db, venueId, keys, known, nowMs);
		writePasswords(passwordsFile, { ...known, ...credentials.passwords });
		if (credentials.added > 0) log(`${credentials.added} new robot credentials, kept in ${passwordsFile}.`);
		const password = await ensureAccounts(db, options);
		const history = await seedHistory(
			{ db, raw },
			{ venue: SALTMARSH.venue, venueId, fleet, seed: 1, nowMs, weeks: options.weeks ?? 8 }
		);
		if (history) log(`${history.days} past days with ${history.halts} halts.`);
		return { emails: ACCOUNTS.map(({ role }) => mailOf(role)), password };
	} finally {
		await close();
	}
}

async function ensureAccounts(
	db: Kysely<Database>,
	{ password: wanted, signInFile, nowMs, log }: SeedOptions
): Promise<string | null> {
	const kept = existsSync(signInFile)
		? (JSON.parse(readFileSync(signInFile, 'utf8')) as { password: string }).password
		: null;
	const known = await Promise.all(ACCOUNTS.map(({ role }) => readUserByEmail(db, mailOf(role))));
	const password = wanted ?? kept ?? (known.some(Boolean) ? null : makePassword());
	if (password === null) return null;
	for (const [i, { role, name }] of ACCOUNTS.entries()) {
		const user = known[i];
		if (!user) await createUser(db, { email: mailOf(role), name, role, password, by: null, nowMs });
		else if (!(await verifyPassword(user.password_hash, password))) {
			if (wanted === undefined) return null;
			await db
				.updateTable('user')
				.set({ password_hash: await hashPassword(password) })
				.where('id', '=', user.id)
				.execute();
			log(`The password of ${mailOf(role)} is now the one in DEMO_PASSWORD.`);
		}
	}
	if (kept !== password) writeFileSync(signInFile, `${JSON.stringify({ password })}\n`, { mode: 0o600 });
	return password;
}

const makePassword = (): string => Array.from({ length: 5 }, () => WORDS[randomInt(WORDS.length)]).join(' ');

async function main(): Promise<void> {
	const databasePath = process.env.DATABASE_PATH || 'data/elbowroom.db';
	const started = performance.now();
	const { emails, password } = await seed({
		databasePath,
		passwordsFile: process.env.DEMO_ROBOTS || 'data/demo-robots.json',
		signInFile: join(dirname(databasePath), 'demo-sign-in.json'),
		password: process.env.DEMO_PASSWORD || undefined,
		nowMs: Date.now(),
		log: (line) => console.log(line)
	});
	console.log(`Seeded in ${((performance.now() - started) / 1000).toFixed(1)} s. Sign in as ${emails.join(', ')}`);
	console.log(
		password === null
			? 'with the password they have; set DEMO_PASSWORD to give them a new one.'
			: `with the password "${password}".`
	);
}

if (process.argv[1]?.endsWith('seed.ts')) {
	try {
		await main();
	} catch (cause) {
		console.error(cause instanceof Error ? cause.message : cause);
		process.exitCode = 1;
	}
}
