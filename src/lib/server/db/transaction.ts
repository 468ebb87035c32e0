/** Writing while somebody else may be writing too. */

import type { Kysely, Transaction } from 'kysely';
import { setTimeout as wait } from 'node:timers/promises';
import type { Database } from './schema.ts';
import { isBusy, storageFailure } from './failures.ts';

/**
 * ms to wait before each further attempt, at most about 2.5 s in all. Chosen by us: longer than any transaction of ours,
 * shorter than a reader's patience; the pauses stop growing early, because whoever waits longest must not lose.
 */
const BACK_OFF_MS = [5, 10, 20, 40, ...new Array<number>(30).fill(80)];

/**
 * Runs `work` in one IMMEDIATE transaction and returns its result. When another connection holds the write lock, tries
 * again a bounded number of times without blocking the thread, so `work` may run more than once: it touches the
 * database only. Inside a transaction already open, runs as a part of it.
 *
 * `work` must use the transaction it is given, never the outer `db`: that would wait for itself for ever.
 *
 * @throws Failure 'storage' when the database stays locked, is read-only, or the disk is full or failing
 */
export async function writeTransaction<T>(
	db: Kysely<Database>,
	work: (trx: Transaction<Database>) => Promise<T>
): Promise<T> {
	if (db.isTransaction) return work(db as Transaction<Database>);
	for (let attempt = 0; ; attempt++) {
		try {
			return await db.transaction().execute(work);
		} catch (cause) {
			const pause = BACK_OFF_MS[attempt];
			if (!isBusy(cause) || pause === undefined) throw storageFailure(cause) ?? cause;
			// Half to all of the pause, so that two writers do not keep meeting.
			await wait(pause * (0.5 + Math.random() / 2));
		}
	}
}
