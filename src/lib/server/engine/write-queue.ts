/** Writes in order, many to a transaction, and keeps what the database refuses until it takes it. */

import type { Kysely, Transaction } from 'kysely';
import type { Logger } from 'pino';
import { setTimeout as wait } from 'node:timers/promises';
import { Failure } from '../../domain/failure.ts';
import type { Database } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';

/** One write. May run more than once, so it touches the database only. What it returns is handed out after the commit. */
export type Write<Result> = (trx: Transaction<Database>) => Promise<Result>;

export interface WriteQueue<Result> {
	push(write: Write<Result>): void;
	/** One sentence while the database refuses; null when all is well. */
	trouble(): string | null;
	/** Resolves when nothing is waiting or the database refuses. */
	settle(): Promise<void>;
	/** Tries a last time and ends. */
	stop(): Promise<void>;
}

export interface WriteQueueOptions<Result> {
	readonly db: Kysely<Database>;
	readonly log: Logger;
	readonly onCommitted: (results: readonly Result[]) => void;
	/** ms between two tries while the database refuses */
	readonly retryMs?: number;
}

/** Writes in one transaction: few enough to leave the file to others soon. */
const BATCH = 200;
/** Writes kept while the database refuses; at one alarm or minute a second this is hours. */
const MOST_KEPT = 20_000;

export function startWriteQueue<Result>({
	db,
	log,
	onCommitted,
	retryMs = 1000
}: WriteQueueOptions<Result>): WriteQueue<Result> {
	let waiting: Write<Result>[] = [];
	let running: Promise<void> | null = null;
	let trouble: string | null = null;
	let lost = 0;
	let stopping = false;
	const retry = new AbortController();

	async function drain(): Promise<void> {
		while (waiting.length > 0) {
			const batch = waiting.slice(0, BATCH);
			try {
				const results = await writeTransaction(db, async (trx) => {
					const all: Result[] = [];
					for (const write of batch) all.push(await write(trx));
					return all;
				});
				waiting = waiting.slice(batch.length);
				if (trouble !== null) log.info('The database takes writes again.');
				trouble = null;
				onCommitted(results);
			} catch (cause) {
				if (cause instanceof Failure && cause.code === 'storage') {
					if (trouble === null) log.error(cause, 'The database refuses writes; they are kept and tried again.');
					trouble = `${cause.message} What happens now is kept in memory until it can be stored.`;
					if (stopping) return;
					await wait(retryMs, undefined, { signal: retry.signal }).catch(() => {});
				} else await drainOneByOne(batch, cause);
			}
		}
	}

	/** A write that can never succeed must not hold up the others. */
	async function drainOneByOne(batch: readonly Write<Result>[], cause: unknown): Promise<void> {
		if (batch.length === 1) {
			waiting = waiting.slice(1);
			log.error(cause, 'One write failed and was left out.');
			return;
		}
		for (const write of batch) {
			try {
				onCommitted([await writeTransaction(db, write)]);
			} catch (failure) {
				if (failure instanceof Failure && failure.code === 'storage') return;
				log.error(failure, 'One write failed and was left out.');
			}
			waiting = waiting.slice(1);
		}
	}

	const settle = () => (running ??= drain().finally(() => (running = null)));

	return {
		push(write) {
			if (waiting.length >= MOST_KEPT) {
				waiting.splice(BATCH, 1);
				lost += 1;
			}
			waiting.push(write);
			if (!stopping) void settle();
		},
		trouble: () => (trouble !== null && lost > 0 ? `${trouble} ${lost} records had to be left out.` : trouble),
		async settle() {
			await settle();
		},
		async stop() {
			stopping = true;
			retry.abort();
			await running;
			await settle();
			if (waiting.length > 0) log.error({ waiting: waiting.length }, 'Records could not be stored before the end.');
		}
	};
}
