/** What the operator of the server can set. The environment is read here once; nothing else in the program looks at it. */

import { randomBytes } from 'node:crypto';
import { z } from 'zod';
import { Failure } from '../domain/failure.ts';

const LOG_LEVELS = ['fatal', 'error', 'warn', 'info', 'debug', 'trace', 'silent'] as const;

const Environment = z
	.object({
		DATABASE_PATH: z.string().default('data/elbowroom.db'),
		/** Unset: the program starts its own broker. */
		MQTT_URL: z
			.url({ protocol: /^(mqtts?|wss?)$/, error: 'must be an address like mqtt://broker.example.org:1883' })
			.optional(),
		MQTT_USERNAME: z.string().optional(),
		MQTT_PASSWORD: z.string().optional(),
		MQTT_PORT: z.coerce.number('must be a number').int().min(0).max(65_535).default(1883),
		/** Only this machine unless told otherwise: 0.0.0.0 lets robots in. */
		MQTT_HOST: z.string().default('127.0.0.1'),
		ENGINE_VENUES: z
			.string()
			.default('')
			.transform((list) =>
				list
					.split(',')
					.map((key) => key.trim())
					.filter((key) => key !== '')
			),
		LOG_LEVEL: z.enum(LOG_LEVELS).default('info'),
		MOSQUITTO_DIR: z.string().optional(),
		SESSION_DAYS: z.coerce.number('must be a number').positive().max(90).default(7),
		METRICS_TOKEN: z.string().min(16, 'must have at least 16 characters').optional()
	})
	.refine(
		({ MOSQUITTO_DIR, MQTT_URL, MQTT_USERNAME, MQTT_PASSWORD }) =>
			MOSQUITTO_DIR === undefined || (MQTT_URL && MQTT_USERNAME && MQTT_PASSWORD),
		{ path: ['MOSQUITTO_DIR'], error: 'needs MQTT_URL, MQTT_USERNAME and MQTT_PASSWORD of that Mosquitto as well' }
	);

export interface Settings {
	readonly databasePath: string;
	readonly mqtt: {
		/** Address of a broker run by somebody else; null starts our own on `host`:`port`. */
		readonly url: string | null;
		readonly host: string;
		/** 0 takes any free port */
		readonly port: number;
		/** The account the program itself uses. For our own broker the password is made anew at each start unless given. */
		readonly username: string;
		readonly password: string;
	};
	/** Keys of the venues served by this process; empty means all. */
	readonly engineVenues: readonly string[];
	readonly logLevel: (typeof LOG_LEVELS)[number];
	/** Where password and access files for an external Mosquitto are written; null writes none. */
	readonly mosquittoDir: string | null;
	/** Days without a visit after which a session ends. */
	readonly sessionDays: number;
	/** Bearer token that /metrics asks for; null lets only this machine read it. */
	readonly metricsToken: string | null;
}

/**
 * Checked settings, frozen. An empty variable counts as unset.
 *
 * @throws Failure 'bad_input' that lists every wrong variable at once
 */
export function readSettings(env: Readonly<Record<string, string | undefined>>): Settings {
	const given = Object.fromEntries(Object.entries(env).filter(([, value]) => value !== undefined && value !== ''));
	const { success, data, error } = Environment.safeParse(given);
	if (!success) {
		throw new Failure('bad_input', `Some settings are wrong.\n${z.prettifyError(error)}`, undefined, { cause: error });
	}
	const own = data.MQTT_URL === undefined;
	return Object.freeze({
		databasePath: data.DATABASE_PATH,
		mqtt: Object.freeze({
			url: data.MQTT_URL ?? null,
			host: data.MQTT_HOST,
			port: data.MQTT_PORT,
			username: data.MQTT_USERNAME ?? (own ? 'elbowroom' : ''),
			password: data.MQTT_PASSWORD ?? (own ? randomBytes(24).toString('base64url') : '')
		}),
		engineVenues: Object.freeze(data.ENGINE_VENUES),
		logLevel: data.LOG_LEVEL,
		mosquittoDir: data.MOSQUITTO_DIR ?? null,
		sessionDays: data.SESSION_DAYS,
		metricsToken: data.METRICS_TOKEN ?? null
	});
}
