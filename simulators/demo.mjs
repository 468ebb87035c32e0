/** `npm run demo`: everything on this machine, from a fresh clone to a live floor. Plain Node, because nothing is installed yet. */

import { spawn, spawnSync } from 'node:child_process';
import { createWriteStream, existsSync, mkdirSync, openSync, readdirSync, readFileSync, statSync } from 'node:fs';
import { createServer } from 'node:net';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

const ROOT = fileURLToPath(new URL('..', import.meta.url));
const HOST = '127.0.0.1';
const DATA = join(ROOT, 'data');
/** s to wait for the web server, and for children to end by themselves */
const READY_WITHIN_S = 60;
const STOP_WITHIN_S = 15;
/** What a build is made from: when any of it is newer than the build, it is built again. */
const SOURCES = [
	'src',
	'migrations',
	'static',
	'package-lock.json',
	'package.json',
	'svelte.config.js',
	'vite.config.ts'
];

const [major = 0, minor = 0] = process.versions.node.split('.').map(Number);
if (major < 20 || (major === 20 && minor < 19)) {
	fail(`Node ${process.versions.node} is too old: this needs 20.19 or newer.`);
}

/** Running children, oldest first. */
const children = [];
let stopping = null;
for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, () => void stop(0));

try {
	await main();
} catch (error) {
	console.error(error instanceof Error ? error.message : error);
	await stop(1);
}

async function main() {
	process.chdir(ROOT);
	mkdirSync(DATA, { recursive: true });
	const port = await freePort('PORT', 4173, 'the pages');
	const mqttPort = await freePort('MQTT_PORT', 1883, 'the robots');

	if (!existsSync('node_modules/.package-lock.json'))
		step('Installing packages (npm ci)', 'npm', ['ci', '--no-audit', '--no-fund']);
	if (isBuildStale()) step('Building (about a minute)', 'npm', ['run', 'build', '--silent'], process.env, 'build.log');
	// The demo always has its own broker and says nothing to one that is set up for something else.
	const env = {
		...process.env,
		MQTT_URL: '',
		MQTT_PORT: String(mqttPort),
		MQTT_HOST: HOST,
		DATABASE_PATH: process.env.DATABASE_PATH || 'data/elbowroom.db',
		NODE_ENV: 'production'
	};
	step('Preparing the database', process.execPath, ['--import', 'tsx', 'simulators/seed.ts'], env);

	const [smtp, mailPages] = [await anyPort(1025), await anyPort(1080)];
	const maildev = [
		'node_modules/maildev/bin/maildev',
		'--ip',
		HOST,
		'--web-ip',
		HOST,
		'--smtp',
		smtp,
		'--web',
		mailPages,
		'--silent'
	];
	start('mail', maildev.map(String), env, false);

	const origin = `http://localhost:${port}`;
	const mail = { SMTP_URL: `smtp://${HOST}:${smtp}` };
	start('web', ['build'], { ...env, ...mail, PORT: String(port), HOST, ORIGIN: process.env.ORIGIN || origin }, true);
	await waitFor(`http://${HOST}:${port}/healthz`);

	const robots = process.env.DEMO_ROBOT_COUNT || '24';
	const scenario = process.env.DEMO_SCENARIO || 'day';
	const fleet = ['--import', 'tsx', 'simulators/simulate.ts', '--robots', robots, '--scenario', scenario];
	start('fleet', [...fleet, '--url', `mqtt://${HOST}:${mqttPort}`, '--quiet'], env, true);

	console.log(`
  Saltmarsh Hall is open:  ${origin}

  Sign in as   operator@example.org, maintainer@example.org, manager@example.org,
               admin@example.org or display@example.org
  Password     ${readPassword(env.DATABASE_PATH)}
  Mail         http://localhost:${mailPages}

  Everything you see is invented: ${robots} robots of three models drive among simulated visitors
  ("${scenario}"; a day passes in about 40 minutes). Before it lie eight made-up weeks of history.
  Data and logs stay in data/. Press Ctrl-C to stop.
`);
}

function fail(message) {
	console.error(message);
	process.exit(1);
}

/** Runs one step to its end; its output goes to the terminal, or to a file in data/ when it is long. */
function step(what, command, args, env = process.env, logName = null) {
	console.log(`${what} …`);
	const shell = process.platform === 'win32' && command === 'npm';
	const out = logName === null ? 'inherit' : openSync(join(DATA, logName), 'w');
	const { status, error } = spawnSync(command, args, {
		cwd: ROOT,
		env,
		stdio: ['ignore', out, out],
		shell
	});
	if (error) throw new Error(`${what} failed: ${error.message}`);
	if (status !== 0) throw new Error(logName === null ? `${what} failed.` : `${what} failed; see data/${logName}.`);
}

/** Starts a Node child that runs on; its output goes to data/NAME.log. The demo ends when a needed one does. */
function start(name, args, env, needed) {
	const file = join('data', `${name}.log`);
	const log = createWriteStream(join(ROOT, file));
	// In a group of its own: Ctrl-C reaches us alone, and we end the children in order.
	const child = spawn(process.execPath, args, {
		cwd: ROOT,
		env,
		stdio: ['ignore', 'pipe', 'pipe'],
		detached: process.platform !== 'win32'
	});
	child.stdout.pipe(log, { end: false });
	child.stderr.pipe(log, { end: false });
	const ended = new Promise((resolve) => child.once('close', resolve));
	children.push({ name, child, ended });
	child.once('error', (error) => console.error(`${name} cannot be started: ${error.message}`));
	void ended.then((code) => {
		if (stopping) return;
		const last = existsSync(file) ? readFileSync(file, 'utf8').trimEnd().split('\n').slice(-8).join('\n') : '';
		console.error(`${name} ended by itself (code ${code}); its last words, from ${file}:\n${last}`);
		if (needed) void stop(1);
	});
}

/** Ends all children, youngest first, waits for each, then exits. */
function stop(code) {
	stopping ??= (async () => {
		if (children.length > 0) console.log('\nStopping …');
		for (const { name, child, ended } of children.reverse()) {
			if (child.exitCode !== null || child.signalCode !== null) continue;
			child.kill('SIGTERM');
			const timer = setTimeout(() => {
				console.error(`${name} did not stop within ${STOP_WITHIN_S} s and is ended by force.`);
				child.kill('SIGKILL');
			}, STOP_WITHIN_S * 1000);
			await ended;
			clearTimeout(timer);
		}
		process.exit(code);
	})();
	return stopping;
}

function isBuildStale() {
	if (!existsSync('build/index.js') || !existsSync('build/threads/engine.js')) return true;
	const built = Math.min(statSync('build/index.js').mtimeMs, statSync('build/threads/engine.js').mtimeMs);
	return SOURCES.some((path) => newest(path) > built);
}

function newest(path) {
	if (!existsSync(path)) return 0;
	const { mtimeMs } = statSync(path);
	if (!statSync(path).isDirectory()) return mtimeMs;
	return Math.max(mtimeMs, ...readdirSync(path).map((name) => newest(join(path, name))));
}

/** The port named by an environment variable, else the usual one; both must be free. */
async function freePort(variable, usual, whom) {
	const port = Number(process.env[variable] || usual);
	if (!Number.isInteger(port) || port < 1 || port > 65535) fail(`${variable} must be a port number from 1 to 65535.`);
	if (await isFree(port)) return port;
	fail(
		`Port ${port}, meant for ${whom}, is taken by another program. Stop that one, or choose another: ${variable}=${port + 1} npm run demo`
	);
}

/** The usual port, or any free one. */
async function anyPort(usual) {
	if (await isFree(usual)) return usual;
	return new Promise((resolve, reject) => {
		const server = createServer();
		server.once('error', reject);
		server.listen(0, HOST, () => {
			const { port } = server.address();
			server.close(() => resolve(port));
		});
	});
}

function isFree(port) {
	return new Promise((resolve) => {
		const server = createServer();
		server.once('error', () => resolve(false));
		server.listen(port, HOST, () => server.close(() => resolve(true)));
	});
}

async function waitFor(url) {
	for (let tries = 0; tries < READY_WITHIN_S * 4; tries++) {
		if (stopping) return stopping;
		try {
			const { status } = await fetch(url);
			if (status < 500) return;
		} catch {
			// Not listening yet.
		}
		await new Promise((resolve) => setTimeout(resolve, 250));
	}
	throw new Error(`The pages did not come up within ${READY_WITHIN_S} s; see data/web.log.`);
}

function readPassword(databasePath) {
	const file = join(dirname(databasePath), 'demo-sign-in.json');
	if (!existsSync(file)) return 'the one you gave them; set DEMO_PASSWORD to give them a new one';
	return JSON.parse(readFileSync(file, 'utf8')).password;
}
