/** Starts the broker and engine threads, starts them again when they die, and knows in words how they are. */

import type { Worker } from 'node:worker_threads';
import type { BrokerStart, EngineStart, FromBroker, FromEngine, ToBroker, ToEngine } from '../../contracts/threads.ts';
import type { LiveHealth } from '../../contracts/live.ts';
import { Failure } from '../../domain/failure.ts';
import type { Settings } from '../settings.ts';
import { startWorker } from './locate.ts';

export interface Threads {
	/** Configuration changed in the database. */
	reload(): void;
	/** People of this venue are learned about anew. */
	forgetFlexibility(venue: string): void;
	health(): LiveHealth;
	/** Ends both threads after they have written what they hold. */
	stop(): Promise<void>;
	/** Port the embedded broker listens on; null when another broker is used. */
	readonly brokerPort: number | null;
}

export interface ThreadLog {
	info(detail: object, message: string): void;
	error(detail: object, message: string): void;
}

export interface StartThreads {
	readonly settings: Settings;
	readonly log: ThreadLog;
	readonly onMessage: (message: FromEngine) => void;
	readonly onHealth: (health: LiveHealth) => void;
	/** For tests: how a worker is made. */
	readonly spawn?: typeof startWorker;
}

/** ms before a dead thread is started again; doubles up to the last while it keeps dying. */
const RESTART_AFTER_MS = [250, 500, 1000, 2000, 5000, 10_000];
/** ms of life after which a thread counts as healthy again */
const SETTLED_MS = 30_000;
/** ms a thread is given to finish before it is ended */
const STOP_WITHIN_MS = 5000;
/** A tick leaves much behind that lives no longer than the tick; with room for several, most of it is never copied. */
const ENGINE_MEMORY = { maxYoungGenerationSizeMb: 64 };
/** ms without a word from the engine after which it counts as stuck */
const ENGINE_QUIET_MS = 5000;

export const UNKNOWN_HEALTH: LiveHealth = {
	server_time_ms: 0,
	broker: false,
	engine: false,
	storage: true,
	troubles: ['The engine is starting.'],
	messages_per_s: 0,
	rejected_total: 0,
	last_message_age_ms: null
};

/** @throws Failure 'unavailable' when the embedded broker cannot start, for instance because its port is taken */
export async function startThreads({
	settings,
	log,
	onMessage,
	onHealth,
	spawn = startWorker
}: StartThreads): Promise<Threads> {
	const { mqtt } = settings;
	let health = UNKNOWN_HEALTH;
	let heardAt = Date.now();
	let engineUp = false;
	let brokerPort: number | null = null;
	let brokerTrouble: string | null = null;

	const tellHealth = () => onHealth(currentHealth());
	const currentHealth = (): LiveHealth => {
		const quiet = Date.now() - heardAt > ENGINE_QUIET_MS;
		const engine = engineUp && !quiet;
		const troubles = engine
			? [...health.troubles]
			: ['The engine stopped and is being started again. What you see is old.'];
		if (brokerTrouble) troubles.unshift(brokerTrouble);
		return { ...health, server_time_ms: Date.now(), engine, troubles };
	};

	let broker: Supervised<ToBroker> | null = null;
	if (mqtt.url === null) {
		const start = (port: number): BrokerStart => ({
			database_path: settings.databasePath,
			host: mqtt.host,
			port,
			service_username: mqtt.username,
			service_password: mqtt.password,
			log_level: settings.logLevel
		});
		let settle: (message: FromBroker) => void = () => {};
		const first = new Promise<FromBroker>((resolve) => (settle = resolve));
		broker = supervise<ToBroker, FromBroker>({
			name: 'broker',
			log,
			// After a restart the port must be the one the robots know, also when the first was any free one.
			spawn: () => spawn('broker', { workerData: start(brokerPort ?? mqtt.port) }),
			hear(message) {
				if (message.type === 'ready') {
					brokerPort = message.port;
					brokerTrouble = null;
				}
				settle(message);
			},
			down() {
				brokerTrouble = 'The broker stopped and is being started again. Robots cannot be heard.';
				settle({ type: 'failed', message: 'The broker stopped while it was starting; see the log.' });
				tellHealth();
			}
		});
		const outcome = await first;
		if (outcome.type !== 'ready') {
			await broker.stop();
			throw new Failure('unavailable', outcome.type === 'failed' ? outcome.message : 'The broker did not start.');
		}
	}

	const engineStart: EngineStart = {
		database_path: settings.databasePath,
		mqtt_url: mqtt.url ?? `mqtt://127.0.0.1:${brokerPort}`,
		mqtt_username: mqtt.username,
		mqtt_password: mqtt.password,
		venues: settings.engineVenues,
		log_level: settings.logLevel
	};
	const engine = supervise<ToEngine, FromEngine>({
		name: 'engine',
		log,
		spawn: () => spawn('engine', { workerData: engineStart, resourceLimits: ENGINE_MEMORY }),
		hear(message) {
			heardAt = Date.now();
			if (message.type === 'ready') engineUp = true;
			if (message.type === 'health') {
				health = message.health;
				tellHealth();
			} else onMessage(message);
		},
		down() {
			engineUp = false;
			tellHealth();
		}
	});
	// A stuck engine sends nothing, so somebody else has to notice.
	const watch = setInterval(() => {
		if (Date.now() - heardAt > ENGINE_QUIET_MS) tellHealth();
	}, 1000);
	watch.unref();

	return {
		reload() {
			broker?.send({ type: 'reload' });
			engine.send({ type: 'reload' });
		},
		forgetFlexibility: (venue) => engine.send({ type: 'forget_flexibility', venue }),
		health: currentHealth,
		get brokerPort() {
			return brokerPort;
		},
		async stop() {
			clearInterval(watch);
			await engine.stop();
			await broker?.stop();
		}
	};
}

interface Supervised<To> {
	send(message: To): void;
	stop(): Promise<void>;
}

interface Supervision<From> {
	readonly name: string;
	readonly log: ThreadLog;
	readonly spawn: () => Worker;
	readonly hear: (message: From) => void;
	readonly down: () => void;
}

/** Keeps one worker thread alive until told to stop. */
function supervise<To, From extends { readonly type: string }>({
	name,
	log,
	spawn,
	hear,
	down
}: Supervision<From>): Supervised<To> {
	let worker: Worker | null = null;
	let stopping = false;
	let failures = 0;
	let again: NodeJS.Timeout | undefined;
	let gone: () => void = () => {};
	const ended = new Promise<void>((resolve) => (gone = resolve));

	const start = () => {
		const startedAt = Date.now();
		const current = spawn();
		worker = current;
		current.on('message', hear);
		current.on('error', (cause) => log.error({ err: cause }, `The ${name} thread failed.`));
		current.on('exit', (code) => {
			worker = null;
			if (stopping) return gone();
			failures = Date.now() - startedAt > SETTLED_MS ? 0 : failures + 1;
			const wait = RESTART_AFTER_MS[Math.min(failures, RESTART_AFTER_MS.length - 1)]!;
			log.error({ code, restart_in_ms: wait }, `The ${name} thread ended; it is started again.`);
			again = setTimeout(start, wait);
			down();
		});
	};
	start();

	return {
		send: (message) => worker?.postMessage(message),
		async stop() {
			stopping = true;
			clearTimeout(again);
			if (worker === null) return;
			worker.postMessage({ type: 'stop' });
			const patience = setTimeout(() => void worker?.terminate(), STOP_WITHIN_MS);
			await ended;
			clearTimeout(patience);
		}
	};
}
