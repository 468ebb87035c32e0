/** Remembers what was not used and why: exact counts, and the latest messages for somebody to look at. */

import { sql, type Kysely } from 'kysely';
import type { Logger } from 'pino';
import type { RejectionReason } from '../../domain/engine/observation.ts';
import type { Database, NewRow } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';
import type { Rejection } from './gate.ts';

/** Messages kept, in memory before a flush and in the table after it. */
export const KEPT_MESSAGES = 1000;
export const KEPT_PAYLOAD_BYTES = 512;
const KEPT_TOPIC_CHARACTERS = 512;
const FLUSH_EVERY_MS = 2000;
/** Rows per statement: SQLite takes 32,766 variables. */
const ROWS_PER_INSERT = 500;
const DAY_MS = 86_400_000;

export interface RejectedLog {
	/** Notes one message; copies the little it keeps of `payload`. Never throws and never waits. */
	record(rejection: Rejection, topic: string, payload: Uint8Array, atMs: number): void;
	/** Since the start, whether stored or not. */
	total(): number;
	byReason(): ReadonlyMap<RejectionReason, number>;
	/** Writes what is waiting; when the database refuses, keeps it for the next time. Never rejects. */
	flush(): Promise<void>;
	/** Flushes a last time and ends. */
	stop(): Promise<void>;
}

export interface RejectedOptions {
	readonly db: Kysely<Database>;
	readonly log: Logger;
	readonly flushEveryMs?: number;
}

/**
 * Starts an empty log that flushes by itself. While the database is away it holds at most KEPT_MESSAGES messages, the
 * oldest going first, and one number per reason, robot and day.
 */
export function startRejectedLog({ db, log, flushEveryMs = FLUSH_EVERY_MS }: RejectedOptions): RejectedLog {
	const totals = new Map<RejectionReason, number>();
	let total = 0;
	let waiting: NewRow<'rejected_message'>[] = [];
	let counts = new Map<string, Count>();
	let flushing: Promise<void> | null = null;
	let failing = false;

	async function flushOnce(): Promise<void> {
		if (counts.size === 0) return;
		const batch = { rows: waiting.slice(-KEPT_MESSAGES), counts };
		waiting = [];
		counts = new Map();
		try {
			await store(db, batch.rows, [...batch.counts.values()]);
			if (failing) log.info('rejected messages are stored again');
			failing = false;
		} catch (cause) {
			if (!failing) log.error(cause, 'rejected messages cannot be stored; they are counted and tried again');
			failing = true;
			waiting = [...batch.rows, ...waiting].slice(-KEPT_MESSAGES);
			for (const count of batch.counts.values()) add(counts, count);
		}
	}

	const flush = () => (flushing ??= flushOnce().finally(() => (flushing = null)));
	const timer = setInterval(() => void flush(), flushEveryMs);

	return {
		record({ reason, robot, detail }, topic, payload, atMs) {
			total++;
			totals.set(reason, (totals.get(reason) ?? 0) + 1);
			add(counts, { reason, robot: robot ?? '', day_ms: Math.floor(atMs / DAY_MS) * DAY_MS, count: 1 });
			waiting.push({
				at_ms: atMs,
				topic: topic.slice(0, KEPT_TOPIC_CHARACTERS).toWellFormed(),
				robot,
				reason,
				detail,
				payload: Buffer.from(payload.subarray(0, KEPT_PAYLOAD_BYTES)),
				size_bytes: payload.length
			});
			// Cut in large steps: dropping one from the front of an array at a time costs a copy each.
			if (waiting.length >= 2 * KEPT_MESSAGES) waiting = waiting.slice(-KEPT_MESSAGES);
		},
		total: () => total,
		byReason: () => totals,
		flush,
		async stop() {
			clearInterval(timer);
			await flushing;
			await flush();
		}
	};
}

type Count = Required<NewRow<'rejected_count'>>;

function add(counts: Map<string, Count>, more: Count): void {
	const key = `${more.reason} ${more.robot} ${more.day_ms}`;
	const known = counts.get(key);
	if (known) counts.set(key, { ...known, count: known.count + more.count });
	else counts.set(key, more);
}

async function store(db: Kysely<Database>, rows: NewRow<'rejected_message'>[], counts: Count[]): Promise<void> {
	await writeTransaction(db, async (trx) => {
		for (let at = 0; at < rows.length; at += ROWS_PER_INSERT) {
			await trx
				.insertInto('rejected_message')
				.values(rows.slice(at, at + ROWS_PER_INSERT))
				.execute();
		}
		for (let at = 0; at < counts.length; at += ROWS_PER_INSERT) {
			await trx
				.insertInto('rejected_count')
				.values(counts.slice(at, at + ROWS_PER_INSERT))
				.onConflict((conflict) =>
					conflict
						.columns(['reason', 'robot', 'day_ms'])
						.doUpdateSet({ count: sql`rejected_count.count + excluded.count` })
				)
				.execute();
		}
		const oldestKept = trx
			.selectFrom('rejected_message')
			.select('id')
			.orderBy('id', 'desc')
			.limit(1)
			.offset(KEPT_MESSAGES - 1);
		await trx.deleteFrom('rejected_message').where('id', '<', oldestKept).execute();
	});
}
