/** The same rules for an external Mosquitto 2: a password file, an access list and a sample configuration. */

import { randomBytes } from 'node:crypto';
import { mkdir, open, rename, rm } from 'node:fs/promises';
import { join, resolve } from 'node:path';
import { CHANNELS, Key, TOPIC_PREFIX } from '../../contracts/mqtt.ts';
import { Failure } from '../../domain/failure.ts';
import { hashForMosquitto, robotUsername, type RobotCredential } from './credentials.ts';
import { MAX_PACKET_BYTES } from './packet-limit.ts';

export interface MosquittoFiles {
	readonly passwordFile: string;
	readonly accessFile: string;
	readonly sampleFile: string;
	/** Robots that cannot sign in because their secret was made without a hash for Mosquitto. */
	readonly without: readonly string[];
}

export interface ServiceAccount {
	readonly username: string;
	readonly password: string;
}

/**
 * Writes `passwd`, `acl` and `mosquitto.conf.sample` into `folder` (made when missing), each replaced in one step and
 * readable by its owner only. Mosquitto takes the new files in on SIGHUP and then ends the connections of names that
 * are gone.
 *
 * Mosquitto knows one password per name: of several credentials in force, the newest with a hash counts.
 *
 * @throws Failure 'storage' when the folder cannot be written, 'bad_input' when a name cannot stand in these files
 */
export async function writeMosquittoFiles(
	folder: string,
	credentials: readonly RobotCredential[],
	service: ServiceAccount
): Promise<MosquittoFiles> {
	const path = (name: string) => join(resolve(folder), name);
	const files = { passwordFile: path('passwd'), accessFile: path('acl'), sampleFile: path('mosquitto.conf.sample') };
	const passwords = passwordLines(credentials, service);
	try {
		await mkdir(folder, { recursive: true, mode: 0o700 });
		await replaceFile(files.passwordFile, passwords.text);
		await replaceFile(files.accessFile, accessList(service.username));
		await replaceFile(files.sampleFile, mosquittoConfiguration(files));
	} catch (cause) {
		throw new Failure('storage', `The files for Mosquitto cannot be written to ${folder}.`, undefined, { cause });
	}
	return { ...files, without: passwords.without };
}

function passwordLines(credentials: readonly RobotCredential[], service: ServiceAccount) {
	if (!/^[\w.-]{1,64}$/.test(service.username)) {
		throw new Failure('bad_input', 'The user name of the application may have letters, digits, ".", "_" and "-" only.');
	}
	const hashes = new Map<string, string | null>();
	for (const { venue, robot, mosquittoHash } of credentials) {
		if (!Key.safeParse(venue).success || !Key.safeParse(robot).success) {
			throw new Failure('bad_input', `${JSON.stringify(robotUsername(venue, robot))} is no name of a robot.`);
		}
		const username = robotUsername(venue, robot);
		hashes.set(username, mosquittoHash ?? hashes.get(username) ?? null);
	}
	const robots = [...hashes].filter(([, hash]) => hash !== null);
	const lines = [...robots, [service.username, hashForMosquitto(service.password)]];
	return {
		text: lines.map(([username, hash]) => `${username}:${hash}\n`).join(''),
		without: [...hashes].filter(([, hash]) => hash === null).map(([username]) => username)
	};
}

/** `%u` is the user name with its slash, `{venue}/{robot}`: one rule serves all robots. Nothing else is allowed. */
function accessList(serviceUsername: string): string {
	const write = Object.keys(CHANNELS).map((channel) => `pattern write ${TOPIC_PREFIX}/%u/${channel}`);
	return [
		'# Written by Elbowroom; changes are lost. Robots publish below their own name and read their own commands.',
		...write,
		`pattern read ${TOPIC_PREFIX}/%u/command`,
		'',
		'# The application reads all robots and publishes commands.',
		`user ${serviceUsername}`,
		`topic read ${TOPIC_PREFIX}/#`,
		`topic write ${TOPIC_PREFIX}/+/+/command`,
		''
	].join('\n');
}

export interface ConfigurationOptions {
	readonly passwordFile: string;
	readonly accessFile: string;
	readonly robotPort?: number;
	readonly servicePort?: number;
	/** Address robots connect to; absent means all addresses. */
	readonly robotHost?: string;
}

/** A commented configuration that works as it stands. */
export function mosquittoConfiguration(options: ConfigurationOptions): string {
	const { passwordFile, accessFile, robotPort = 1883, servicePort = 1884, robotHost = '' } = options;
	return `# Sample for Mosquitto 2, written by Elbowroom. Copy it before you change it.
# Mosquitto must run as a user who may read the two files below; they are readable by their owner only.
# After Elbowroom has changed them, send Mosquitto a SIGHUP.

per_listener_settings false
allow_anonymous false
password_file ${passwordFile}
acl_file ${accessFile}

# Payloads that are merely too large must arrive, so that they are reported; beyond this the connection ends.
max_packet_size ${MAX_PACKET_BYTES}

# A command missed while away must not be carried out later. Robots connect with a clean session and check
# expires_at; this clears away what others leave behind.
persistent_client_expiration 1h
queue_qos0_messages false
set_tcp_nodelay true

# Robots. The user name replaces the client id, so a second connection with one credential ends the first.
# Outside a closed network add cafile, certfile and keyfile here (TLS, port 8883).
listener ${[robotPort, robotHost].join(' ').trim()}
use_username_as_clientid true

# The application, on the same machine; it opens several connections with one name.
# Set MQTT_URL=mqtt://127.0.0.1:${servicePort}
listener ${servicePort} 127.0.0.1
`;
}

async function replaceFile(path: string, text: string): Promise<void> {
	const draft = `${path}.${randomBytes(6).toString('hex')}`;
	try {
		const file = await open(draft, 'wx', 0o600);
		try {
			await file.writeFile(text);
			await file.sync();
		} finally {
			await file.close();
		}
		await rename(draft, path);
	} catch (cause) {
		await rm(draft, { force: true });
		throw cause;
	}
}
