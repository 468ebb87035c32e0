/** The messages of all robots, from whatever broker is in use. */

import { connect } from 'mqtt';
import { randomUUID } from 'node:crypto';
import { parseTopic, TOPIC_PREFIX } from '../../contracts/mqtt.ts';

const RECONNECT_MS = 1000;
const CONNECT_TIMEOUT_MS = 10_000;
const KEEP_ALIVE_S = 15;
const LOST = 'The connection to the broker is lost.';
const REFUSED = 'The broker does not let the application read the robots: check its access list.';

export type SourceState =
	| { readonly kind: 'connecting' }
	/** Subscribed: messages arrive. */
	| { readonly kind: 'connected' }
	/** Trying again; `message` is one sentence for the operator. */
	| { readonly kind: 'disconnected'; readonly message: string };

export interface MqttSourceOptions {
	readonly url: string;
	readonly username: string;
	readonly password: string;
	/** Only these venues; empty means all. */
	readonly venues: readonly string[];
	/**
	 * Called synchronously, in order of arrival. `retained`: the broker had
	 * kept the message from before we subscribed.
	 */
	onMessage(topic: string, payload: Buffer, retained: boolean): void;
	/** Called on every change, never twice with the same state. */
	onState?(state: SourceState): void;
}

export interface MqttSource {
	state(): SourceState;
	stop(): Promise<void>;
}

/**
 * Connects and keeps connecting for ever, with a clean session and a new client id, and subscribes anew each time.
 * The subscription is a plain one: a shared one would let two readers take the messages of one robot out of order
 * (MQTT 5.0 §4.8.2), and would bring no kept messages. Commands, which are ours, are left out.
 */
export function startMqttSource(options: MqttSourceOptions): MqttSource {
	const venues = options.venues.length === 0 ? ['+'] : options.venues;
	const filters = venues.map((venue) => `${TOPIC_PREFIX}/${venue}/+/+`);
	let state: SourceState = { kind: 'connecting' };
	let trouble = LOST;
	let again: NodeJS.Timeout | undefined;
	let stopped = false;

	const client = connect(options.url, {
		protocolVersion: 4,
		clean: true,
		clientId: `elbowroom-ingest-${randomUUID()}`,
		username: options.username,
		password: options.password,
		reconnectPeriod: RECONNECT_MS,
		connectTimeout: CONNECT_TIMEOUT_MS,
		keepalive: KEEP_ALIVE_S,
		reconnectOnConnackError: true,
		resubscribe: false
	});

	function subscribe(): void {
		client.subscribe(filters, { qos: 1 }, (error) => {
			if (stopped || !client.connected) return;
			trouble = error ? REFUSED : LOST;
			enter(error ? { kind: 'disconnected', message: trouble } : { kind: 'connected' });
			if (error) again = setTimeout(subscribe, RECONNECT_MS);
		});
	}

	client.on('connect', subscribe);
	client.on('message', (topic, payload, packet) => {
		if (!topic.endsWith('/command') || parseTopic(topic) === null) options.onMessage(topic, payload, packet.retain);
	});
	client.on('error', (error) => {
		trouble = sentence(error);
	});
	client.on('close', () => {
		clearTimeout(again);
		if (!stopped) enter({ kind: 'disconnected', message: trouble });
	});

	function enter(next: SourceState): void {
		if (JSON.stringify(next) === JSON.stringify(state)) return;
		state = next;
		options.onState?.(next);
	}

	return {
		state: () => state,
		async stop() {
			stopped = true;
			clearTimeout(again);
			await client.endAsync(true);
		}
	};
}

function sentence(error: Error & { code?: unknown }): string {
	// CONNACK return codes 4 and 5: bad user name or password, not authorized (MQTT 3.1.1 §3.2.2.3)
	if (error.code === 4 || error.code === 5) return 'The broker refuses the user name or password of the application.';
	if (error.code === 'ECONNREFUSED') return 'The broker cannot be reached: nothing answers at its address.';
	if (error.code === 'ENOTFOUND') return 'The broker cannot be reached: its address is not known.';
	return 'The broker cannot be reached.';
}
