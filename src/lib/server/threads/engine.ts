/** Entry of the engine's worker thread. */

import { parentPort, workerData } from 'node:worker_threads';
import type { EngineStart, FromEngine, ToEngine } from '../../contracts/threads.ts';
import { startEngine } from '../engine/engine.ts';
import { createLog } from '../telemetry/log.ts';

const start = workerData as EngineStart;
const log = createLog({ logLevel: start.log_level }).child({ thread: 'engine' });
const tell = (message: FromEngine) => parentPort?.postMessage(message);

try {
	const engine = await startEngine(start, log, tell);
	parentPort?.on('message', (message: ToEngine) => {
		if (message.type === 'reload') {
			engine.reload().catch((cause: unknown) => log.error(cause, 'the changed configuration cannot be read'));
			return;
		}
		if (message.type === 'forget_flexibility') return engine.forgetFlexibility(message.venue);
		void engine.stop().then(() => {
			tell({ type: 'stopped' });
			parentPort?.close();
		});
	});
	tell({ type: 'ready' });
} catch (cause) {
	log.fatal(cause, 'the engine cannot start');
	process.exitCode = 1;
	parentPort?.close();
}
