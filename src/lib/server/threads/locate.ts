/** Where a worker thread's entry lies: built beside the server in production, TypeScript in the source tree otherwise. */

import { existsSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { Worker, type WorkerOptions } from 'node:worker_threads';

/** tsx asked for with `--import` leaves worker threads alone, so its loader is registered inside the thread. */
export const SOURCE_LOADER = `data:text/javascript,import{register}from'node:module';register('tsx/esm','${import.meta.url}',{data:{}})`;

/** Starts `name` as a worker thread. Under the build it is plain JavaScript; from sources it runs through tsx. */
export function startWorker(name: 'broker' | 'engine', options: WorkerOptions): Worker {
	const entry = locateThread(name);
	const execArgv = entry.endsWith('.ts') ? ['--import', SOURCE_LOADER] : [];
	return new Worker(entry, { ...options, name, execArgv });
}

/** @throws Error when neither a built nor a source entry is found above this file */
export function locateThread(name: string, from = fileURLToPath(import.meta.url)): string {
	for (let folder = dirname(from); ; folder = dirname(folder)) {
		for (const candidate of [
			join(folder, 'threads', `${name}.js`),
			join(folder, 'src', 'lib', 'server', 'threads', `${name}.ts`)
		]) {
			if (existsSync(candidate)) return candidate;
		}
		if (folder === dirname(folder))
			throw new Error(`The program for the ${name} thread is missing: run "npm run build".`);
	}
}
