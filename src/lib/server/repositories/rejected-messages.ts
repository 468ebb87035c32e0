/** Robot messages that were not used, and why. Written by ingest; this is the reading side. */

import type { Kysely } from 'kysely';
import type { Database, Row } from '../db/schema.ts';

/** Newest first; at most `limit`, only those after the cursor. */
export async function readRejectedMessages(
	db: Kysely<Database>,
	{ after, limit }: { after?: { readonly atMs: number; readonly id: number } | undefined; limit: number }
): Promise<Row<'rejected_message'>[]> {
	let query = db.selectFrom('rejected_message').selectAll();
	if (after !== undefined) {
		query = query.where(({ eb, refTuple, tuple }) => eb(refTuple('at_ms', 'id'), '<', tuple(after.atMs, after.id)));
	}
	return query.orderBy('at_ms', 'desc').orderBy('id', 'desc').limit(limit).execute();
}

/** Counts of the days from `fromDayMs` on, newest day first, then the largest; at most `limit`. */
export async function readRejectedCounts(
	db: Kysely<Database>,
	fromDayMs: number,
	limit = 1000
): Promise<Row<'rejected_count'>[]> {
	return db
		.selectFrom('rejected_count')
		.selectAll()
		.where('day_ms', '>=', fromDayMs)
		.orderBy('day_ms', 'desc')
		.orderBy('count', 'desc')
		.limit(limit)
		.execute();
}
