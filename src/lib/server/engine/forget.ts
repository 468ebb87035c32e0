/** Somebody decides that people of a venue are to be learned about anew, for instance after the floor was laid out differently. */

import type { Kysely } from 'kysely';
import { Failure } from '../../domain/failure.ts';
import type { Database } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';
import { insertAuditEvent } from '../repositories/users.ts';
import type { Threads } from '../threads/supervisor.ts';

/**
 * Forgets the learned flexibility of a venue; the default is used until enough is known again. The act is kept in the audit
 * trail.
 *
 * @throws Failure 'not_found' | 'storage'
 */
export async function forgetFlexibility(
	{ db, threads }: { readonly db: Kysely<Database>; readonly threads: Pick<Threads, 'forgetFlexibility'> },
	{ venue, by, nowMs }: { venue: string; by: string; nowMs: number }
): Promise<void> {
	await writeTransaction(db, async (trx) => {
		const known = await trx.selectFrom('venue').select('id').where('key', '=', venue).executeTakeFirst();
		if (known === undefined) throw new Failure('not_found', 'There is no such venue.');
		const subject = `venue ${venue}`;
		await insertAuditEvent(trx, { at_ms: nowMs, actor_user_id: by, act: 'flexibility_forgotten', subject });
	});
	threads.forgetFlexibility(venue);
}
