/** Accounts of people. */

import type { Kysely } from 'kysely';
import { randomUUID } from 'node:crypto';
import { Failure } from '../../domain/failure.ts';
import type { Database, Role } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';
import { insertAuditEvent, insertUser, readUserByEmail } from '../repositories/users.ts';
import { hashPassword } from './passwords.ts';
import type { SessionUser } from './sessions.ts';

export interface NewUser {
	readonly email: string;
	readonly name: string;
	readonly role: Role;
	readonly password: string;
	/** Who creates it; null for the program itself */
	readonly by: string | null;
	readonly nowMs: number;
}

/**
 * Creates an account.
 *
 * @throws Failure 'bad_input' for a password that is too short or too long
 * @throws Failure 'conflict' when the mail address is taken
 */
export async function createUser(db: Kysely<Database>, user: NewUser): Promise<SessionUser> {
	const { email, name, role, by, nowMs } = user;
	const password_hash = await hashPassword(user.password);
	const id = randomUUID();
	await writeTransaction(db, async (trx) => {
		if ((await readUserByEmail(trx, email)) !== undefined) {
			throw new Failure('conflict', `There is an account for ${email} already.`);
		}
		await insertUser(trx, { id, email, name, role, password_hash, created_at_ms: nowMs, disabled_at_ms: null });
		await insertAuditEvent(trx, {
			at_ms: nowMs,
			actor_user_id: by,
			act: 'user_created',
			subject: email,
			detail: { role }
		});
	});
	return { id, email, name, role };
}
