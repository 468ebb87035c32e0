/** Entry of the broker's worker thread: the broker, fed with credentials from the database. */

import { parentPort, workerData } from 'node:worker_threads';
import type { BrokerStart, FromBroker, ToBroker } from '../../contracts/threads.ts';
import { Failure } from '../../domain/failure.ts';
import { startBroker, type Broker } from '../broker/broker.ts';
import { readRobotCredentials } from '../broker/read-credentials.ts';
import { openDatabase, type OpenDatabase } from '../db/connection.ts';
import { createLog } from '../telemetry/log.ts';

const RELOAD_AGAIN_MS = 1000;

const start = workerData as BrokerStart;
const log = createLog({ logLevel: start.log_level }).child({ thread: 'broker' });
const tell = (message: FromBroker) => parentPort?.postMessage(message);

async function run(): Promise<void> {
	const database = openDatabase(start.database_path, { readonly: true });
	const broker = await startBroker({
		host: start.host,
		port: start.port,
		service: { username: start.service_username, password: start.service_password },
		credentials: await readRobotCredentials(database.db),
		log
	}).catch(async (cause: unknown) => {
		await database.close();
		throw cause;
	});
	obey(broker, database);
	tell({ type: 'ready', port: broker.port });
}

function obey(broker: Broker, database: OpenDatabase): void {
	let again: NodeJS.Timeout | undefined;
	let stopped = false;

	async function reload(): Promise<void> {
		clearTimeout(again);
		try {
			const credentials = await readRobotCredentials(database.db);
			if (!stopped) broker.replaceCredentials(credentials);
		} catch (cause) {
			if (stopped) return;
			log.error(cause, 'credentials cannot be read; trying again');
			again = setTimeout(() => void reload(), RELOAD_AGAIN_MS);
		}
	}

	async function stop(): Promise<void> {
		if (stopped) return;
		stopped = true;
		clearTimeout(again);
		await broker.stop();
		await database.close();
		tell({ type: 'stopped' });
		parentPort?.close();
	}

	parentPort?.on('message', (message: ToBroker) => void (message.type === 'stop' ? stop() : reload()));
}

run().catch((cause: unknown) => {
	if (!(cause instanceof Failure)) log.fatal(cause, 'broker');
	const message =
		cause instanceof Failure ? cause.message : 'The broker stopped for a reason it did not expect; see the log.';
	tell({ type: 'failed', message });
	parentPort?.close();
});
