/** The program as a whole: what it is made of, and in which order it starts and stops. */

import type { Kysely } from 'kysely';
import type { LiveHealth } from '../contracts/live.ts';
import type { FromEngine } from '../contracts/threads.ts';
import { readLiveAlarms } from './alarms/read.ts';
import { createAuth, type Auth } from './auth/sessions.ts';
import { writeMosquittoFiles } from './broker/mosquitto-files.ts';
import { readRobotCredentials } from './broker/read-credentials.ts';
import { watchConfiguration } from './configuration-watch.ts';
import { openDatabase } from './db/connection.ts';
import { migrateToLatest } from './db/migrate.ts';
import type { Database } from './db/schema.ts';
import { createHub, type LiveHub } from './live/hub.ts';
import type { Settings } from './settings.ts';
import { createLog, type Log } from './telemetry/log.ts';
import { createMetrics, type Metrics } from './telemetry/metrics.ts';
import { startThreads, UNKNOWN_HEALTH, type StartThreads, type Threads } from './threads/supervisor.ts';

export interface App {
	readonly settings: Settings;
	readonly db: Kysely<Database>;
	readonly log: Log;
	readonly hub: LiveHub;
	readonly metrics: Metrics;
	readonly auth: Auth;
	/** Broker and engine, which run apart from the web so that neither a page nor a report can delay an alarm. */
	readonly threads: Threads;
	/** Stops everything in reverse order of starting. May be called more than once. */
	stop(): Promise<void>;
}

/** Readers take a silent line for dead after 5 s, so health is told well before, engine or not. */
const HEALTH_EVERY_MS = 2000;
/** Somebody who adds a floor or a robot waits no longer than this for it. */
const CONFIGURATION_EVERY_MS = 3000;
const SWEEP_EVERY_MS = 3_600_000;

/**
 * Starts everything. What has been started is stopped again when a later part fails.
 *
 * @param start starts broker and engine; tests bring their own
 * @throws Failure in words for the operator when the database cannot be used or a port is taken
 */
export async function startApp(
	settings: Settings,
	start: (parts: StartThreads) => Promise<Threads> = startThreads
): Promise<App> {
	const log = createLog(settings);
	const running: (() => Promise<void> | void)[] = [];
	let stopping: Promise<void> | undefined;
	const stop = () => (stopping ??= stopAll(running, log));
	const every = (ms: number, work: () => Promise<void> | void) => {
		const timer = setInterval(() => void guarded(work, log), ms);
		running.push(() => clearInterval(timer));
	};

	try {
		const { db, close } = openDatabase(settings.databasePath);
		running.push(close);
		const applied = await migrateToLatest(db);
		if (applied.length > 0) log.info({ applied }, 'database brought up to date');

		const hub = createHub({
			health: { ...UNKNOWN_HEALTH, server_time_ms: Date.now() },
			alarms: await readLiveAlarms(db)
		});
		let health: () => LiveHealth = () => UNKNOWN_HEALTH;
		const metrics = createMetrics({
			readers: () => hub.readers,
			messagesPerS: () => health().messages_per_s,
			rejectedTotal: () => health().rejected_total
		});
		const auth = createAuth({ db, sessionDays: settings.sessionDays, metrics });

		await writeBrokerFiles(settings, db, log);
		const threads = await start({
			settings,
			log,
			onMessage: (message) => pass(message, hub),
			onHealth: (news) => hub.publishHealth(news)
		});
		running.push(() => threads.stop());
		health = () => threads.health();
		hub.publishHealth(threads.health());
		// Before the threads, so that readers do not wait for them.
		running.push(() => hub.close());

		every(HEALTH_EVERY_MS, () => hub.publishHealth(threads.health()));
		every(SWEEP_EVERY_MS, () => auth.sweep());
		every(
			CONFIGURATION_EVERY_MS,
			watchConfiguration(db, async () => {
				log.info('floors, robots or credentials changed');
				await writeBrokerFiles(settings, db, log);
				threads.reload();
			})
		);
		return { settings, db, log, hub, metrics, auth, threads, stop };
	} catch (cause) {
		await stop();
		throw cause;
	}
}

/** An external Mosquitto learns of our robots by files; ours reads the database itself. */
async function writeBrokerFiles({ mosquittoDir, mqtt }: Settings, db: Kysely<Database>, log: Log): Promise<void> {
	if (mosquittoDir === null) return;
	const { without } = await writeMosquittoFiles(mosquittoDir, await readRobotCredentials(db), mqtt);
	log.info({ folder: mosquittoDir }, 'files for Mosquitto written; send it a SIGHUP');
	if (without.length > 0) log.warn({ robots: without }, 'these robots need a new credential to sign in at Mosquitto');
}

function pass(message: FromEngine, hub: LiveHub): void {
	switch (message.type) {
		case 'frame':
			return hub.publishFrame(message.frame);
		case 'field':
			return hub.publishField(message.field);
		case 'alarm':
			return hub.publishAlarm(message.alarm);
		case 'health':
			return hub.publishHealth(message.health);
		case 'ready':
		case 'stopped':
			// The supervisor's business.
			return;
	}
}

async function stopAll(running: (() => Promise<void> | void)[], log: Log): Promise<void> {
	for (const end of running.reverse()) await guarded(end, log);
	running.length = 0;
}

/** One part that fails to end must not keep the others from ending. */
async function guarded(work: () => Promise<void> | void, log: Log): Promise<void> {
	try {
		await work();
	} catch (cause) {
		log.error({ err: cause }, 'background work failed');
	}
}
