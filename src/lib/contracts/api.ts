/**
 * Answers of `/api/v1`. snake_case, units in the names, ms since the epoch; null is "not measured" or "not known".
 * Live answers (frame, health, alarms) have the shapes of `live.ts`.
 */

import { z } from 'zod';
import type {
	AlarmPriority,
	AlarmState,
	AlarmType,
	HaltKind,
	LiveAlarm,
	LiveFrame,
	LiveRobot,
	Verdict
} from './live.ts';

export const HALT_KINDS = ['freeze', 'stall', 'dither', 'fault', 'silent'] as const satisfies readonly HaltKind[];
export const VERDICTS = ['open', 'shared', 'packed', 'unseen'] as const satisfies readonly Verdict[];
export const ALARM_STATES = [
	'unacknowledged',
	'acknowledged',
	'returned',
	'cleared'
] as const satisfies readonly AlarmState[];
const ALARM_TYPES = [...HALT_KINDS, 'ingest', 'duplicate_credential'] as const satisfies readonly AlarmType[];
const ALARM_PRIORITIES = ['high', 'medium', 'low'] as const satisfies readonly AlarmPriority[];

/** Error answer, `application/problem+json` (RFC 9457). */
export const Problem = z.object({
	type: z.string(),
	title: z.string(),
	status: z.int(),
	detail: z.string(),
	details: z.unknown().optional(),
	/** Names the request in the server's log */
	request_id: z.string().optional()
});

/** GET /floors/{floor}/frame: the floor now. `age_ms` is the age of the frame when it was sent. */
export type FrameAnswer = LiveFrame & { readonly age_ms: number };

/** GET /floors */
export const FloorList = z.object({
	floors: z.array(
		z.object({
			key: z.string(),
			name: z.string(),
			sort: z.int(),
			venue: z.object({ key: z.string(), name: z.string(), town: z.string(), time_zone: z.string() })
		})
	)
});

/** One halt of one robot from onset to end. */
export const Incident = z.object({
	id: z.string(),
	venue: z.string(),
	floor: z.string(),
	/** Zone at onset, by key; null outside all zones */
	zone: z.string().nullable(),
	zone_name: z.string().nullable(),
	robot: z.string(),
	mark: z.string(),
	model: z.string(),
	alarm_id: z.int().nullable(),
	cause_group: z.string(),
	kind: z.enum(HALT_KINDS),
	verdict: z.enum(VERDICTS),
	onset_ms: z.int(),
	detected_ms: z.int(),
	/** null while it lasts */
	ended_ms: z.int().nullable(),
	end_reason: z.string().nullable(),
	x_m: z.number(),
	y_m: z.number(),
	heading_rad: z.number(),
	/** persons/m² just before onset */
	density_per_m2: z.number().nullable(),
	/** Observed share behind `density_per_m2`, 0…1 */
	density_coverage: z.number().nullable(),
	room_alone_m_s: z.number().nullable(),
	room_shared_m_s: z.number().nullable(),
	persons_within_2m: z.int().nullable(),
	nearest_person_m: z.number().nullable(),
	/** Observed share of the way ahead, 0…1 */
	observed_share: z.number().nullable(),
	/** How much people yield as a rule at this place, m/s */
	flexibility_m_s: z.number().nullable(),
	software: z.string().nullable(),
	task_id: z.string().nullable()
});

/** GET /incidents/{id} */
export const IncidentDetail = Incident.extend({
	/** Whatever else the detector wrote down, as it wrote it */
	evidence: z.unknown().nullable()
});

/** GET /incidents: newest onset first. `next_cursor` is null on the last page. */
export const IncidentPage = z.object({ incidents: z.array(Incident), next_cursor: z.string().nullable() });

export const Alarm = z.object({
	id: z.int(),
	type: z.enum(ALARM_TYPES),
	priority: z.enum(ALARM_PRIORITIES),
	state: z.enum(ALARM_STATES),
	floor: z.string().nullable(),
	zone: z.string().nullable(),
	place: z.string(),
	what: z.string(),
	action: z.string(),
	x_m: z.number().nullable(),
	y_m: z.number().nullable(),
	raised_at_ms: z.int(),
	onset_ms: z.int(),
	returned_at_ms: z.int().nullable(),
	acknowledged_at_ms: z.int().nullable(),
	/** Name of the person */
	acknowledged_by: z.string().nullable(),
	/** Keys */
	robots: z.array(z.string()),
	/** Identifiers */
	incidents: z.array(z.string()),
	revision: z.int()
}) satisfies z.ZodType<LiveAlarm>;

/** GET /alarms: newest first. POST /alarms/{id}/acknowledge answers with one `Alarm`. */
export const AlarmPage = z.object({ alarms: z.array(Alarm), next_cursor: z.string().nullable() });

const RobotModelAnswer = z.object({
	key: z.string(),
	name: z.string(),
	letter: z.string(),
	length_m: z.number(),
	width_m: z.number(),
	radius_m: z.number(),
	max_speed_m_s: z.number()
});

/** GET /robots: all robots in service. */
export const RobotList = z.object({
	robots: z.array(
		z.object({
			venue: z.string(),
			key: z.string(),
			mark: z.string(),
			model: RobotModelAnswer,
			/** Floor it is on; null when it is on none now */
			floor: z.string().nullable(),
			/** As in the floor's frame; null when it is on none now */
			live: z.custom<LiveRobot>().nullable()
		})
	)
});

/** GET /rejected-messages: newest first, and counts per UTC day. */
export const RejectedMessages = z.object({
	messages: z.array(
		z.object({
			id: z.int(),
			at_ms: z.int(),
			topic: z.string(),
			robot: z.string().nullable(),
			reason: z.string(),
			detail: z.string(),
			/** First 512 bytes at most */
			payload_base64: z.string(),
			size_bytes: z.int()
		})
	),
	counts: z.array(z.object({ reason: z.string(), robot: z.string().nullable(), day_ms: z.int(), count: z.int() })),
	next_cursor: z.string().nullable()
});

export type Problem = z.infer<typeof Problem>;
export type FloorList = z.infer<typeof FloorList>;
export type Incident = z.infer<typeof Incident>;
export type IncidentDetail = z.infer<typeof IncidentDetail>;
export type IncidentPage = z.infer<typeof IncidentPage>;
export type AlarmPage = z.infer<typeof AlarmPage>;
export type RobotList = z.infer<typeof RobotList>;
export type RejectedMessages = z.infer<typeof RejectedMessages>;
