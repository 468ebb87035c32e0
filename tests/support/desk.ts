/** The whole program as it runs in production, on its own folder and free ports, with Saltmarsh Hall in it. */

import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { seed } from '../../simulators/seed.ts';
import { readPasswords } from '../../simulators/provision.ts';
import { freePort, until } from './brokers.ts';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));

export interface Desk {
	readonly url: string;
	readonly mqttUrl: string;
	readonly folder: string;
	readonly databasePath: string;
	readonly password: string;
	/** Robot key → secret */
	readonly credentials: Readonly<Record<string, string>>;
	/** Everything it has written so far */
	log(): string;
	/** Ends the process as an operator would and starts it again on the same data and ports. */
	restart(): Promise<void>;
	stop(): Promise<void>;
}

/** Needs a build (`npm run build`). */
export async function startDesk(): Promise<Desk> {
	if (!existsSync(join(ROOT, 'build', 'index.js'))) throw new Error('There is no build: run "npm run build" first.');
	const folder = mkdtempSync(join(tmpdir(), 'desk-'));
	const databasePath = join(folder, 'elbowroom.db');
	const passwordsFile = join(folder, 'robots.json');
	const password = 'quay-and-lantern-27';
	const signInFile = join(folder, 'sign-in.json');
	await seed({ databasePath, passwordsFile, signInFile, password, nowMs: Date.now(), log: () => {} });
	const [port, mqttPort] = [await freePort(), await freePort()];
	const url = `http://127.0.0.1:${port}`;
	let output = '';
	let child: ChildProcess | null = null;

	async function start(): Promise<void> {
		const started = spawn(process.execPath, ['build'], {
			cwd: ROOT,
			env: {
				PATH: process.env['PATH'],
				NODE_ENV: 'production',
				HOST: '127.0.0.1',
				PORT: String(port),
				ORIGIN: url,
				MQTT_PORT: String(mqttPort),
				DATABASE_PATH: databasePath,
				LOG_LEVEL: 'warn'
			},
			stdio: ['ignore', 'pipe', 'pipe']
		});
		child = started;
		for (const stream of [started.stdout, started.stderr]) stream.on('data', (text) => (output += String(text)));
		await until(async () => {
			if (started.exitCode !== null) throw new Error(`The desk ended by itself:\n${output}`);
			return (await fetch(`${url}/healthz`).catch(() => null))?.ok;
		}, 'the desk to answer');
	}

	async function end(): Promise<void> {
		if (child === null || child.exitCode !== null) return;
		const exited = once(child, 'exit');
		child.kill('SIGTERM');
		await exited;
	}

	await start();
	return {
		url,
		mqttUrl: `mqtt://127.0.0.1:${mqttPort}`,
		folder,
		databasePath,
		password,
		credentials: readPasswords(passwordsFile),
		log: () => output,
		async restart() {
			await end();
			await start();
		},
		async stop() {
			await end();
			rmSync(folder, { recursive: true, force: true });
		}
	};
}
