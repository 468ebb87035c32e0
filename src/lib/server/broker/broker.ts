/** The application's own MQTT 3.1.1 broker, for a venue that does not run one. */

import { Aedes, type AuthenticateError, type Client } from 'aedes';
import { createServer, type Server, type Socket } from 'node:net';
import type { Logger } from 'pino';
import { Failure } from '../../domain/failure.ts';
import { mayPublish, maySubscribe, type Identity } from './access.ts';
import { checkRobotSecret, hashRobotSecret, robotUsername, type RobotCredential } from './credentials.ts';
import { limitPackets } from './packet-limit.ts';
import { createRefusals, type Refusals } from './refusals.ts';

/** Ten times the largest fleet we measure; keeps a runaway program from using up all sockets. */
const MAX_CONNECTIONS = 2000;
const TCP_KEEP_ALIVE_MS = 30_000;
/** Where refused messages go: nobody may subscribe to it. */
const NOWHERE = '$refused';
/** CONNACK return code "bad user name or password" (MQTT 3.1.1 §3.2.2.3) */
const BAD_LOGIN = 4;

export interface BrokerOptions {
	readonly host: string;
	/** 0 takes any free port. */
	readonly port: number;
	readonly service: { readonly username: string; readonly password: string };
	readonly credentials: readonly RobotCredential[];
	readonly log: Logger;
}

export interface Broker {
	readonly port: number;
	/** Puts other credentials in force and ends the connections of those that are gone. */
	replaceCredentials(credentials: readonly RobotCredential[]): void;
	/** What was refused since the start, by kind. */
	refused(): Readonly<Record<string, number>>;
	/** Ends all connections and frees the port. */
	stop(): Promise<void>;
}

/**
 * Starts the broker and returns once robots can connect.
 *
 * A robot signs in as `{venue}/{robot}`; whatever client id it sends, that name is used, so a second connection with
 * the same credential ends the first (MQTT 3.1.1 [MQTT-3.1.4-2]). Every session is a clean one: a command missed while
 * away is never carried out later. A message nobody may publish is dropped and counted and the connection stays, as
 * does one with a subscription that is refused (0x80 in the SUBACK). Kept messages live in memory.
 *
 * @throws Failure 'unavailable', one sentence, when the port cannot be opened
 */
export async function startBroker(options: BrokerOptions): Promise<Broker> {
	const refusals = createRefusals(options.log);
	const gatekeeper = createGatekeeper(options, refusals);
	const aedes = await Aedes.createBroker({
		// Messages on their way at once. With few, each waits for others' turns of the event loop; what bounds memory is that
		// no robot is read from while its last messages are on their way.
		concurrency: 5000,
		connectTimeout: 10_000,
		drainTimeout: 10_000,
		preConnect(_client, packet, done) {
			packet.clean = true;
			if (packet.username !== undefined && packet.username !== options.service.username)
				packet.clientId = packet.username;
			done(null, true);
		},
		authenticate(client, username, password, done) {
			const who = gatekeeper.recognise(username, password);
			if (who === null) {
				refusals.count('login', username);
				return done(badLogin(), false);
			}
			gatekeeper.admit(client, who);
			done(null, true);
		},
		authorizePublish(client, packet, done) {
			const who = client && gatekeeper.who(client);
			const permission = who ? mayPublish(who, packet.topic, packet.retain, packet.payload.length) : 'refused';
			if (permission !== 'granted') packet.retain = false;
			if (permission === 'refused') {
				refusals.count('publish', client?.id, packet.topic);
				// An error here would end the connection: one wrong topic must not silence a robot.
				packet.topic = NOWHERE;
				packet.payload = Buffer.alloc(0);
			}
			done(null);
		},
		authorizeSubscribe(client, subscription, done) {
			const who = gatekeeper.who(client);
			if (who && maySubscribe(who, subscription.topic)) return done(null, subscription);
			refusals.count('subscribe', client.id, subscription.topic);
			done(null, null);
		}
	});
	aedes.on('clientDisconnect', gatekeeper.forget);
	const ended = (client: Client | null, error: Error & { errorCode?: number }) => {
		// A CONNACK with an error is a refused login, which is counted where it is refused.
		if (error.errorCode === undefined) refusals.count('connection', client?.id ?? undefined, error.message);
	};
	aedes.on('clientError', ended);
	aedes.on('connectionError', ended);
	(aedes as NodeJS.EventEmitter).on('error', (error: Error) => options.log.error(error, 'broker'));

	const sockets = new Set<Socket>();
	const server = createServer((socket) => {
		sockets.add(socket);
		socket.once('close', () => sockets.delete(socket));
		socket.setNoDelay(true);
		socket.setKeepAlive(true, TCP_KEEP_ALIVE_MS);
		limitPackets(socket);
		aedes.handle(socket);
	});
	server.maxConnections = MAX_CONNECTIONS;
	const close = () => new Promise<void>((resolve) => aedes.close(resolve));
	const port = await listen(server, options).catch(async (cause: NodeJS.ErrnoException) => {
		await close();
		throw new Failure('unavailable', portSentence(cause, options), undefined, { cause });
	});

	return {
		port,
		replaceCredentials: gatekeeper.replace,
		refused: refusals.totals,
		async stop() {
			const closed = new Promise<void>((resolve) => server.close(() => resolve()));
			await close();
			for (const socket of sockets) socket.destroy();
			await closed;
			refusals.stop();
		}
	};
}

/** Knows who may sign in and who has. */
function createGatekeeper({ service, credentials }: BrokerOptions, refusals: Refusals) {
	const serviceHash = hashRobotSecret(service.password);
	/** Compared against for names we do not know, so that they take as long as those we do. */
	const nobody = { id: -1, passwordHash: hashRobotSecret('') };
	const present = new Map<Client, Identity>();
	const identities = new WeakMap<Client, Identity>();
	let known = byUsername(credentials);

	function recognise(username: string | undefined, password: Buffer | undefined): Identity | null {
		const secret = password ?? '';
		if (username === service.username) return checkRobotSecret(secret, serviceHash) ? { kind: 'service' } : null;
		const candidates = known.get(username ?? '') ?? [nobody];
		const match = candidates.filter(({ passwordHash }) => checkRobotSecret(secret, passwordHash))[0];
		return match && match !== nobody && username !== undefined
			? { kind: 'robot', username, credential: match.id }
			: null;
	}

	return {
		recognise,
		admit(client: Client, who: Identity): void {
			present.set(client, who);
			// Outlives the connection: the last will is judged after it has ended.
			identities.set(client, who);
			client.conn.once('close', () => present.delete(client));
		},
		who: (client: Client): Identity | undefined => identities.get(client),
		forget: (client: Client): void => void present.delete(client),
		replace(next: readonly RobotCredential[]): void {
			known = byUsername(next);
			const valid = new Set(next.map(({ id }) => id));
			for (const [client, who] of present) {
				if (who.kind === 'service' || valid.has(who.credential)) continue;
				refusals.count('revoked', who.username);
				client.close();
			}
		}
	};
}

function byUsername(credentials: readonly RobotCredential[]): Map<string, RobotCredential[]> {
	const map = new Map<string, RobotCredential[]>();
	for (const credential of credentials) {
		const username = robotUsername(credential.venue, credential.robot);
		const list = map.get(username);
		if (list) list.push(credential);
		else map.set(username, [credential]);
	}
	return map;
}

function listen(server: Server, { host, port }: BrokerOptions): Promise<number> {
	return new Promise((resolve, reject) => {
		server.once('error', reject);
		server.listen({ host, port, exclusive: true }, () => {
			server.off('error', reject);
			const address = server.address();
			resolve(typeof address === 'object' && address !== null ? address.port : port);
		});
	});
}

function portSentence({ code, message }: NodeJS.ErrnoException, { host, port }: BrokerOptions): string {
	switch (code) {
		case 'EADDRINUSE':
			return `Port ${port} on ${host} is taken by another program, so robots cannot connect: stop that program or set MQTT_PORT.`;
		case 'EACCES':
			return `Port ${port} on ${host} may not be opened by this account: set MQTT_PORT to a number above 1023.`;
		case 'EADDRNOTAVAIL':
		case 'ENOTFOUND':
			return `${host} is not an address of this machine: correct MQTT_HOST.`;
		default:
			return `Port ${port} on ${host} cannot be opened: ${message}.`;
	}
}

const badLogin = (): AuthenticateError =>
	Object.assign(new Error('bad user name or password'), { returnCode: BAD_LOGIN });
