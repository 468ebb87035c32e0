/** What the web thread and its worker threads say to each other. Structured clones, so plain data only. */

import type { LiveAlarm, LiveField, LiveFrame, LiveHealth } from './live.ts';

/** Handed to the engine thread as `workerData`. */
export interface EngineStart {
	readonly database_path: string;
	readonly mqtt_url: string;
	readonly mqtt_username: string;
	readonly mqtt_password: string;
	/** Only these venues are served by this engine; empty means all. */
	readonly venues: readonly string[];
	readonly log_level: string;
}

export type ToEngine =
	/** Floors, zones, robots or rules changed in the database. */
	| { readonly type: 'reload' }
	/** Forget how people of a venue give way and learn it anew. */
	| { readonly type: 'forget_flexibility'; readonly venue: string }
	| { readonly type: 'stop' };

export type FromEngine =
	| { readonly type: 'ready' }
	| { readonly type: 'frame'; readonly frame: LiveFrame }
	| { readonly type: 'field'; readonly field: LiveField }
	/** Sent after the change is committed. */
	| { readonly type: 'alarm'; readonly alarm: LiveAlarm }
	| { readonly type: 'health'; readonly health: LiveHealth }
	| { readonly type: 'stopped' };

/** Handed to the broker thread as `workerData`. */
export interface BrokerStart {
	readonly database_path: string;
	readonly port: number;
	readonly host: string;
	/** Account of the application itself: may read all robots' topics and publish commands. */
	readonly service_username: string;
	readonly service_password: string;
	readonly log_level: string;
}

export type ToBroker =
	/** Credentials changed in the database; also drops connections of credentials that are gone. */
	{ readonly type: 'reload' } | { readonly type: 'stop' };

export type FromBroker =
	| { readonly type: 'ready'; readonly port: number }
	/** The broker cannot run; `message` is one sentence for the operator. */
	| { readonly type: 'failed'; readonly message: string }
	| { readonly type: 'stopped' };
