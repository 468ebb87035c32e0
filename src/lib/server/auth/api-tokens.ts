/** Tokens with which programs use the API in a person's name. */

import type { Kysely } from 'kysely';
import { Failure } from '../../domain/failure.ts';
import type { Database, Role } from '../db/schema.ts';
import { storageFailure } from '../db/failures.ts';
import { writeTransaction } from '../db/transaction.ts';
import { insertAuditEvent } from '../repositories/users.ts';
import { hasRole, tokenRole } from './roles.ts';
import { generateSecret, hashSecret } from './secrets.ts';
import type { SessionUser } from './sessions.ts';

/** Makes a token found by accident (in a log, in a repository) recognisable for what it is. */
const PREFIX = 'elbowroom_';

/** How exactly the last use is known; writing it at every request would make every read a write. */
const USE_NOTED_EVERY_MS = 60_000;

/**
 * Creates a token and returns it: it is shown this once, only its hash is stored.
 *
 * @param role what the token may do, at most what `user` may do
 * @throws Failure 'forbidden' for a role beyond the user's
 */
export async function createApiToken(
	db: Kysely<Database>,
	{ user, name, role, nowMs }: { user: SessionUser; name: string; role: Role; nowMs: number }
): Promise<{ id: number; token: string }> {
	if (!hasRole(user, role)) throw new Failure('forbidden', `A token of yours cannot act as ${role}.`);
	const token = PREFIX + generateSecret();
	const id = await writeTransaction(db, async (trx) => {
		const row = await trx
			.insertInto('api_token')
			.values({ user_id: user.id, name, role, token_hash: hashSecret(token), created_at_ms: nowMs })
			.returning('id')
			.executeTakeFirstOrThrow();
		const subject = `api_token ${row.id}`;
		await insertAuditEvent(trx, {
			at_ms: nowMs,
			actor_user_id: user.id,
			act: 'api_token_created',
			subject,
			detail: { name, role }
		});
		return row.id;
	});
	return { id, token };
}

/** The person a token acts for, in the role the token has; null when it is unknown, revoked, or its owner is disabled. */
export async function validateApiToken(
	db: Kysely<Database>,
	token: string,
	nowMs: number
): Promise<{ tokenId: number; user: SessionUser } | null> {
	if (!token.startsWith(PREFIX)) return null;
	const row = await liveTokens(db)
		.select(['api_token.id', 'api_token.role as token_role', 'api_token.last_used_at_ms'])
		.select(['user.id as user_id', 'user.email', 'user.name', 'user.role'])
		.where('api_token.token_hash', '=', hashSecret(token))
		.executeTakeFirst();
	if (row === undefined) return null;
	if (nowMs - (row.last_used_at_ms ?? 0) >= USE_NOTED_EVERY_MS) await noteUse(db, row.id, nowMs);
	const { user_id: id, email, name } = row;
	return { tokenId: row.id, user: { id, email, name, role: tokenRole(row.role, row.token_role) } };
}

/** A person's own tokens that are still good, newest first; at most `limit`. Never the secrets: those are not stored. */
export async function listApiTokens(db: Kysely<Database>, userId: string, limit = 100) {
	return db
		.selectFrom('api_token')
		.select(['id', 'name', 'role', 'created_at_ms', 'last_used_at_ms'])
		.where('user_id', '=', userId)
		.where('revoked_at_ms', 'is', null)
		.orderBy('id', 'desc')
		.limit(limit)
		.execute();
}

/**
 * Withdraws one of a person's own tokens; from then on it opens nothing. Withdrawing it again changes nothing.
 *
 * @throws Failure 'not_found' when the person has no such token
 */
export async function revokeApiToken(
	db: Kysely<Database>,
	{ user, id, nowMs }: { user: SessionUser; id: number; nowMs: number }
): Promise<void> {
	await writeTransaction(db, async (trx) => {
		const own = await trx
			.selectFrom('api_token')
			.select('revoked_at_ms')
			.where('id', '=', id)
			.where('user_id', '=', user.id)
			.executeTakeFirst();
		if (own === undefined) throw new Failure('not_found', 'You have no such token.');
		if (own.revoked_at_ms !== null) return;
		await trx.updateTable('api_token').set({ revoked_at_ms: nowMs }).where('id', '=', id).execute();
		const subject = `api_token ${id}`;
		await insertAuditEvent(trx, { at_ms: nowMs, actor_user_id: user.id, act: 'api_token_revoked', subject });
	});
}

/** Whether a token is still good. */
export const isApiTokenLive = async (db: Kysely<Database>, tokenId: number): Promise<boolean> =>
	(await liveTokens(db).select('api_token.id').where('api_token.id', '=', tokenId).executeTakeFirst()) !== undefined;

const liveTokens = (db: Kysely<Database>) =>
	db
		.selectFrom('api_token')
		.innerJoin('user', 'user.id', 'api_token.user_id')
		.where('api_token.revoked_at_ms', 'is', null)
		.where('user.disabled_at_ms', 'is', null);

/** Reading goes on while the database refuses writes. */
async function noteUse(db: Kysely<Database>, id: number, nowMs: number): Promise<void> {
	try {
		await db.updateTable('api_token').set({ last_used_at_ms: nowMs }).where('id', '=', id).execute();
	} catch (cause) {
		if (storageFailure(cause) === null) throw cause;
	}
}
