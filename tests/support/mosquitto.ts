/** A Mosquitto of the tests' own, configured by the files the application writes. */

import { spawn, type ChildProcess } from 'node:child_process';
import { existsSync } from 'node:fs';
import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { connect } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { mosquittoConfiguration, writeMosquittoFiles } from '../../src/lib/server/broker/mosquitto-files.ts';
import { freePort, robotSet, SERVICE, until, type BrokerKind, type TestBroker } from './brokers.ts';

const PATHS = [
	'/usr/sbin/mosquitto',
	'/usr/local/sbin/mosquitto',
	'/usr/bin/mosquitto',
	'/opt/homebrew/sbin/mosquitto'
];
const PATH = PATHS.find((path) => existsSync(path));

/** Why Mosquitto cannot be tested here; null when it can. A CI run has no such excuse. */
export function whyNoMosquitto(): string | null {
	if (PATH !== undefined) return null;
	if (process.env.CI === 'true') throw new Error('CI needs the Debian package mosquitto.');
	return 'mosquitto is not installed (Debian: apt-get install mosquitto), so only the own broker is tested';
}

export const MOSQUITTO: BrokerKind = {
	name: 'Mosquitto',
	async start(): Promise<TestBroker> {
		const folder = await mkdtemp(join(tmpdir(), 'mosquitto-'));
		const robots = robotSet();
		const [robotPort, servicePort] = [await freePort(), await freePort()];
		const write = () => writeMosquittoFiles(folder, robots.credentials(), SERVICE);
		const files = await write();
		const configuration = mosquittoConfiguration({ ...files, robotPort, servicePort, robotHost: '127.0.0.1' });
		// Started by root it would change to another user, who may not read our files.
		const user = process.getuid?.() === 0 ? 'user root\n' : '';
		await writeFile(join(folder, 'mosquitto.conf'), user + configuration);

		const run = () => launch(join(folder, 'mosquitto.conf'), [robotPort, servicePort]);
		let child = await run();
		return {
			robotUrl: `mqtt://127.0.0.1:${robotPort}`,
			serviceUrl: `mqtt://127.0.0.1:${servicePort}`,
			secret: robots.secret,
			async revoke(robot) {
				robots.revoke(robot);
				await write();
				child.kill('SIGHUP');
			},
			async restart() {
				await end(child);
				child = await run();
			},
			async stop() {
				await end(child);
				await rm(folder, { recursive: true, force: true });
			}
		};
	}
};

async function launch(configuration: string, ports: readonly number[]): Promise<ChildProcess> {
	const child = spawn(PATH ?? 'mosquitto', ['-c', configuration], { stdio: ['ignore', 'ignore', 'pipe'] });
	let said = '';
	child.stderr.on('data', (text: Buffer) => (said += text.toString()));
	await until(async () => {
		if (child.exitCode !== null) throw new Error(`Mosquitto ended at once: ${said}`);
		return (await Promise.all(ports.map(answers))).every(Boolean);
	});
	return child;
}

async function end(child: ChildProcess): Promise<void> {
	if (child.exitCode !== null || child.signalCode !== null) return;
	const gone = new Promise((resolve) => child.once('exit', resolve));
	child.kill('SIGTERM');
	await gone;
}

const answers = (port: number): Promise<boolean> =>
	new Promise((resolve) => {
		const socket = connect(port, '127.0.0.1');
		socket.once('connect', () => resolve(true));
		socket.once('error', () => resolve(false));
		socket.once('connect', () => socket.destroy());
	});
