/** Writes a simulated or recorded venue into the database: floors, robots and their credentials. Adds what is missing, changes nothing else. */

import { existsSync, mkdirSync, readFileSync, renameSync, writeFileSync } from 'node:fs';
import { dirname } from 'node:path';
import type { Kysely } from 'kysely';
import { z } from 'zod';
import type { Floor, Robot } from '../src/lib/domain/floor.ts';
import { checkRobotSecret, generateRobotSecret, robotSecretHashes } from '../src/lib/server/broker/credentials.ts';
import type { Database } from '../src/lib/server/db/schema.ts';
import { writeTransaction } from '../src/lib/server/db/transaction.ts';
import { floorExists, insertFloor } from '../src/lib/server/repositories/floors.ts';
import type { Venue } from './venue/model.ts';

export interface Provision {
	readonly venue: Venue;
	readonly floors: readonly Floor[];
	readonly robots: readonly Robot[];
	readonly nowMs: number;
}

/** Adds the venue, its floors with zones and maps, and its robots with their models, each only when it is not there yet. */
export async function provisionVenue(
	db: Kysely<Database>,
	plan: Provision
): Promise<{ venueId: number; added: number }> {
	const { venue, floors, robots, nowMs } = plan;
	return writeTransaction(db, async (trx) => {
		let added = 0;
		const venueId = await ensureVenue(trx, venue);
		for (const [sort, floor] of floors.entries()) {
			if (await floorExists(trx, floor.key)) continue;
			await insertFloor(trx, { venueId, floor, sort, nowMs, labels: [] });
			added++;
		}
		for (const { key, mark, model } of robots) {
			const known = await trx
				.selectFrom('robot')
				.select('id')
				.where('venue_id', '=', venueId)
				.where('key', '=', key)
				.executeTakeFirst();
			if (known) continue;
			const modelId = await ensureModel(trx, model);
			await trx
				.insertInto('robot')
				.values({ venue_id: venueId, key, mark, model_id: modelId, retired_at_ms: null })
				.execute();
			added++;
		}
		return { venueId, added };
	});
}

async function ensureVenue(trx: Kysely<Database>, { key, name, town, timeZone }: Venue): Promise<number> {
	const known = await trx.selectFrom('venue').select('id').where('key', '=', key).executeTakeFirst();
	if (known) return known.id;
	const row = { key, name, town, time_zone: timeZone };
	return (await trx.insertInto('venue').values(row).returning('id').executeTakeFirstOrThrow()).id;
}

async function ensureModel(trx: Kysely<Database>, model: Robot['model']): Promise<number> {
	const known = await trx.selectFrom('robot_model').select('id').where('key', '=', model.key).executeTakeFirst();
	if (known) return known.id;
	const { key, name, letter, length, width, radius, maxSpeed } = model;
	const row = { key, name, letter, length_m: length, width_m: width, radius_m: radius, max_speed_m_s: maxSpeed };
	return (await trx.insertInto('robot_model').values(row).returning('id').executeTakeFirstOrThrow()).id;
}

/** Robot key → password of one venue. */
export type Passwords = Record<string, string>;

/**
 * A working password for every robot named. Passwords given in `known` stay when they still work; a robot without one
 * gets a new one, and what it had before is revoked.
 */
export async function ensureCredentials(
	db: Kysely<Database>,
	venueId: number,
	robots: readonly string[],
	known: Readonly<Passwords>,
	nowMs: number
): Promise<{ passwords: Passwords; added: number }> {
	return writeTransaction(db, async (trx) => {
		const passwords: Passwords = {};
		let added = 0;
		for (const key of robots) {
			const { id } = await trx
				.selectFrom('robot')
				.select('id')
				.where('venue_id', '=', venueId)
				.where('key', '=', key)
				.executeTakeFirstOrThrow();
			const valid = await trx
				.selectFrom('robot_credential')
				.selectAll()
				.where('robot_id', '=', id)
				.where('revoked_at_ms', 'is', null)
				.execute();
			const password = known[key];
			if (password !== undefined && valid.some(({ password_hash }) => checkRobotSecret(password, password_hash))) {
				passwords[key] = password;
				continue;
			}
			await trx
				.updateTable('robot_credential')
				.set({ revoked_at_ms: nowMs })
				.where('robot_id', '=', id)
				.where('revoked_at_ms', 'is', null)
				.execute();
			const secret = (passwords[key] = generateRobotSecret());
			await trx
				.insertInto('robot_credential')
				.values({ robot_id: id, ...robotSecretHashes(secret), created_at_ms: nowMs, revoked_at_ms: null })
				.execute();
			added++;
		}
		return { passwords, added };
	});
}

const PasswordFile = z.record(z.string(), z.string());

/** Passwords kept from an earlier run; empty when there is no such file or it cannot be read. */
export function readPasswords(file: string): Passwords {
	if (!existsSync(file)) return {};
	try {
		return PasswordFile.parse(JSON.parse(readFileSync(file, 'utf8')));
	} catch {
		return {};
	}
}

/** Replaces the file in one go, readable by its owner only. */
export function writePasswords(file: string, passwords: Readonly<Passwords>): void {
	mkdirSync(dirname(file), { recursive: true });
	const text = `${JSON.stringify(passwords, null, '\t')}\n`;
	if (existsSync(file) && readFileSync(file, 'utf8') === text) return;
	writeFileSync(`${file}.new`, text, { mode: 0o600 });
	renameSync(`${file}.new`, file);
}
