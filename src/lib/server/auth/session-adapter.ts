/** Sessions in our own tables, behind the interface Lucia asks for. The token itself is never stored, only its hash. */

import type { Kysely } from 'kysely';
import type { Adapter, DatabaseSession, DatabaseUser } from 'lucia';
import { storageFailure } from '../db/failures.ts';
import type { Database, Role } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';
import { hashSecret } from './secrets.ts';

declare module 'lucia' {
	interface Register {
		Lucia: import('lucia').Lucia<{ createdAtMs: number }, { email: string; name: string; role: Role }>;
		DatabaseUserAttributes: { email: string; name: string; role: Role };
		DatabaseSessionAttributes: { createdAtMs: number };
	}
}

/** A disabled person has no session: theirs read as missing and are removed. */
export class SessionAdapter implements Adapter {
	readonly #db: Kysely<Database>;
	readonly #now: () => number;

	constructor(db: Kysely<Database>, now: () => number) {
		this.#db = db;
		this.#now = now;
	}

	async getSessionAndUser(token: string): Promise<[DatabaseSession | null, DatabaseUser | null]> {
		const row = await this.#db
			.selectFrom('session')
			.innerJoin('user', 'user.id', 'session.user_id')
			.select(['session.user_id', 'session.expires_at_ms', 'session.created_at_ms'])
			.select(['user.email', 'user.name', 'user.role', 'user.disabled_at_ms'])
			.where('session.id', '=', hashSecret(token))
			.executeTakeFirst();
		if (row === undefined) return [null, null];
		const session: DatabaseSession = {
			id: token,
			userId: row.user_id,
			expiresAt: new Date(row.expires_at_ms),
			attributes: { createdAtMs: row.created_at_ms }
		};
		if (row.disabled_at_ms !== null) return [session, null];
		const { email, name, role } = row;
		return [session, { id: row.user_id, attributes: { email, name, role } }];
	}

	async getUserSessions(): Promise<DatabaseSession[]> {
		// Lucia would want the tokens here, which nobody has.
		return [];
	}

	async setSession(session: DatabaseSession): Promise<void> {
		await writeTransaction(this.#db, (trx) =>
			trx
				.insertInto('session')
				.values({
					id: hashSecret(session.id),
					user_id: session.userId,
					created_at_ms: session.attributes.createdAtMs,
					expires_at_ms: session.expiresAt.getTime()
				})
				.execute()
		);
	}

	async updateSessionExpiration(token: string, expiresAt: Date): Promise<void> {
		await this.#whenPossible(
			this.#db
				.updateTable('session')
				.set({ expires_at_ms: expiresAt.getTime() })
				.where('id', '=', hashSecret(token))
				.execute()
		);
	}

	async deleteSession(token: string): Promise<void> {
		await writeTransaction(this.#db, (trx) => trx.deleteFrom('session').where('id', '=', hashSecret(token)).execute());
	}

	async deleteUserSessions(userId: string): Promise<void> {
		await writeTransaction(this.#db, (trx) => trx.deleteFrom('session').where('user_id', '=', userId).execute());
	}

	async deleteExpiredSessions(): Promise<void> {
		await this.#whenPossible(this.#db.deleteFrom('session').where('expires_at_ms', '<=', this.#now()).execute());
	}

	/** Housekeeping that can wait: reading pages must go on while the database refuses writes. */
	async #whenPossible(write: Promise<unknown>): Promise<void> {
		try {
			await write;
		} catch (cause) {
			if (storageFailure(cause) === null) throw cause;
		}
	}
}
