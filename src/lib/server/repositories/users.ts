/** People and the trail of what they did. */

import type { Kysely } from 'kysely';
import type { Database, NewRow, Row } from '../db/schema.ts';

export async function insertUser(db: Kysely<Database>, user: NewRow<'user'>): Promise<Row<'user'>> {
	return db.insertInto('user').values(user).returningAll().executeTakeFirstOrThrow();
}

/** The person with this mail address, whatever its capitals; disabled ones included. */
export async function readUserByEmail(db: Kysely<Database>, email: string): Promise<Row<'user'> | undefined> {
	return db.selectFrom('user').selectAll().where('email', '=', email).executeTakeFirst();
}

/** Adds a line to the audit trail. `detail` holds plain facts, never a secret. */
export async function insertAuditEvent(
	db: Kysely<Database>,
	{ detail = {}, ...event }: Omit<NewRow<'audit_event'>, 'detail' | 'id'> & { detail?: Record<string, unknown> }
): Promise<void> {
	await db
		.insertInto('audit_event')
		.values({ ...event, detail: JSON.stringify(detail) })
		.execute();
}
