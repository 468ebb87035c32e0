/** The native robot contract: topics and messages of `elbowroom/v1/{venue}/{robot}/{channel}`. JSON, SI units, the robot's own map frame. */

import { z } from 'zod';

export const TOPIC_PREFIX = 'elbowroom/v1';

/** Largest payload accepted, bytes. A full people message of 500 persons is about 40 kB. */
export const MAX_PAYLOAD_BYTES = 128 * 1024;

/** Venue and robot keys: one topic level, nothing that MQTT or a path could read as syntax. */
export const Key = z.string().regex(/^[a-z0-9][a-z0-9_.-]{0,62}$/);

/** ms since the epoch; bounded so that a stamp in seconds or microseconds is refused, not taken for 1970 or the year 50000. */
const Stamp = z.number().min(946_684_800_000).max(4_102_444_800_000);
const Sequence = z.int().min(0).max(Number.MAX_SAFE_INTEGER);
/** Metres; anything beyond 100 km is not a place in a venue. */
const Metres = z.number().min(-100_000).max(100_000);
/** m/s; nothing here drives or walks faster. */
const Speed = z.number().min(-20).max(20);
const MapName = z.string().min(1).max(64);

export const Pose = z.object({
	t: Stamp,
	seq: Sequence,
	map: MapName,
	x: Metres,
	y: Metres,
	/** rad, counter-clockwise from the map's +x */
	heading: z.number().min(-1000).max(1000),
	vx: Speed.optional(),
	vy: Speed.optional(),
	speed: Speed,
	/** xx, xy, yy of the position, m² */
	cov: z.tuple([z.number().min(0), z.number(), z.number().min(0)]).optional()
});

export const ObservedPerson = z.object({
	/** The robot's own temporary id: means nothing to another robot or after a restart. */
	id: z.union([z.string().max(64), z.int()]).transform(String),
	x: Metres,
	y: Metres,
	vx: Speed.optional(),
	vy: Speed.optional(),
	/** Standard deviation of the position, m */
	sd: z.number().positive().max(10).optional()
});

export const People = z.object({
	t: Stamp,
	seq: Sequence,
	map: MapName,
	range_m: z.number().positive().max(200),
	/** rad from the heading, counter-clockwise; absent means all round */
	fov: z.tuple([z.number().min(-7).max(7), z.number().min(-7).max(7)]).optional(),
	/** Corner list of the part of the view that was not seen, map frame */
	blocked: z
		.array(z.tuple([Metres, Metres]))
		.min(3)
		.max(500)
		.optional(),
	persons: z.array(ObservedPerson).max(2000)
});

export const RobotMode = z.enum([
	'automatic',
	'semiautomatic',
	'intervened',
	'manual',
	'service',
	'teach_in',
	'startup'
]);
export const ErrorLevel = z.enum(['warning', 'urgent', 'critical', 'fatal']);

export const State = z.object({
	t: Stamp,
	seq: Sequence,
	tasked: z.boolean(),
	task: z
		.object({
			id: z.string().max(120),
			goal: z.object({ x: Metres, y: Metres }),
			route: z
				.array(z.tuple([Metres, Metres]))
				.max(2000)
				.optional()
		})
		.optional(),
	mode: RobotMode,
	paused: z.boolean(),
	estop: z.boolean(),
	charging: z.boolean(),
	/** Share of a full battery, 0…1 */
	battery: z.number().min(0).max(1),
	localized: z.boolean(),
	errors: z.array(z.object({ code: z.string().max(120), level: ErrorLevel, text: z.string().max(500) })).max(50),
	software: z.string().max(120)
});

export const Connection = z.object({ t: Stamp, status: z.enum(['online', 'offline', 'lost']) });

export const Command = z.object({
	id: z.string().min(1).max(64),
	kind: z.enum(['pause', 'resume', 'hold_at', 'return']),
	args: z.record(z.string(), z.unknown()).optional(),
	expires_at: Stamp
});

export const Answer = z.object({
	id: z.string().min(1).max(64),
	status: z.enum(['seen', 'running', 'done', 'failed', 'refused']),
	text: z.string().max(500).optional()
});

/** What a robot may publish. Quality of service and retention as robots are asked to use them. */
export const CHANNELS = {
	pose: { schema: Pose, qos: 0, retain: false },
	people: { schema: People, qos: 0, retain: false },
	state: { schema: State, qos: 1, retain: true },
	connection: { schema: Connection, qos: 1, retain: true },
	answer: { schema: Answer, qos: 1, retain: false }
} as const;

export type Channel = keyof typeof CHANNELS;
export const isChannel = (name: string): name is Channel => Object.hasOwn(CHANNELS, name);

export type Pose = z.infer<typeof Pose>;
export type People = z.infer<typeof People>;
export type State = z.infer<typeof State>;
export type Connection = z.infer<typeof Connection>;
export type Command = z.infer<typeof Command>;
export type Answer = z.infer<typeof Answer>;

export interface RobotTopic {
	readonly venue: string;
	readonly robot: string;
	/** Last level as sent; may be unknown. */
	readonly channel: string;
}

/** Topic a robot publishes on or, for `command`, reads. */
export const robotTopic = (venue: string, robot: string, channel: Channel | 'command'): string =>
	`${TOPIC_PREFIX}/${venue}/${robot}/${channel}`;

/** Venue, robot and channel of a topic, or null when it is not one of ours. */
export function parseTopic(topic: string): RobotTopic | null {
	const levels = topic.split('/');
	if (levels.length !== 5 || `${levels[0]}/${levels[1]}` !== TOPIC_PREFIX) return null;
	const [, , venue = '', robot = '', channel = ''] = levels;
	return Key.safeParse(venue).success && Key.safeParse(robot).success ? { venue, robot, channel } : null;
}
