/** The tables as Kysely sees them. Times are ms since the epoch, flags 0 or 1, JSON columns hold text parsed at the edge. */

import type { ColumnType, Generated, Insertable, Selectable } from 'kysely';
import type { AlarmPriority, AlarmState, AlarmType, HaltKind, Verdict } from '../../contracts/live.ts';

export type Role = 'display' | 'operator' | 'maintainer' | 'manager' | 'admin';

/** JSON text. The database refuses text that is not JSON; its shape is checked by whoever reads it. */
type Json = string;
type Flag = 0 | 1;
/** Kept as inserted: no update changes it. */
type Fixed<T> = ColumnType<T, T, never>;

interface VenueTable {
	id: Generated<number>;
	key: string;
	name: string;
	town: string;
	/** IANA name */
	time_zone: string;
}

interface FloorTable {
	id: Generated<number>;
	venue_id: number;
	key: string;
	name: string;
	sort: Generated<number>;
	/** `{ walkable, walls, edges_block_sight, waiting_places, labels? }`, metres */
	plan: Json;
	created_at_ms: number;
}

interface FloorMapTable {
	id: Generated<number>;
	floor_id: number;
	map: string;
	scale: number;
	rotation_rad: number;
	tx_m: number;
	ty_m: number;
}

interface ZoneTable {
	id: Generated<number>;
	floor_id: number;
	key: string;
	name: string;
	/** `{ outer, holes }`, metres */
	polygon: Json;
	scheme: string;
	threshold_per_m2: number | null;
	private: ColumnType<Flag, Flag | undefined, Flag>;
}

interface RobotModelTable {
	id: Generated<number>;
	key: string;
	name: string;
	letter: string;
	length_m: number;
	width_m: number;
	radius_m: number;
	max_speed_m_s: number;
}

interface RobotTable {
	id: Generated<number>;
	venue_id: number;
	key: string;
	mark: string;
	model_id: number;
	retired_at_ms: number | null;
}

interface RobotCredentialTable {
	id: Generated<number>;
	robot_id: number;
	/** SHA-256 of a generated secret of at least 128 bits: nothing to guess, so no slow hash is needed. */
	password_hash: string;
	/** The same secret as an external Mosquitto wants it in its password file. */
	mosquitto_hash: string | null;
	created_at_ms: number;
	revoked_at_ms: number | null;
}

interface RuleSetTable {
	id: Generated<number>;
	/** null applies to every venue without its own */
	venue_id: number | null;
	version: number;
	rules: Json;
	published_at_ms: number;
	reason: string;
}

interface UserTable {
	id: string;
	email: string;
	name: string;
	role: Role;
	/** Argon2id */
	password_hash: string;
	created_at_ms: number;
	disabled_at_ms: number | null;
}

interface SessionTable {
	/** SHA-256 (hex) of the token in the cookie */
	id: string;
	user_id: string;
	created_at_ms: Fixed<number>;
	expires_at_ms: number;
}

interface ApiTokenTable {
	id: Generated<number>;
	user_id: string;
	name: string;
	/** SHA-256 (hex) of the token */
	token_hash: string;
	/** What the token may do; never more than its user may. */
	role: Role;
	created_at_ms: number;
	last_used_at_ms: number | null;
	revoked_at_ms: number | null;
}

interface AuditEventTable {
	id: Generated<number>;
	at_ms: Fixed<number>;
	actor_user_id: Fixed<string | null>;
	act: Fixed<string>;
	subject: Fixed<string>;
	detail: ColumnType<Json, Json | undefined, never>;
}

interface AlarmTable {
	id: Generated<number>;
	venue_id: number;
	/** What makes two alarms the same; unique among alarms of a venue that are not cleared. */
	dedupe_key: string;
	type: AlarmType;
	priority: AlarmPriority;
	state: AlarmState;
	floor_id: number | null;
	zone_id: number | null;
	place: string;
	what: string;
	action: string;
	x_m: number | null;
	y_m: number | null;
	onset_ms: number;
	raised_at_ms: number;
	returned_at_ms: number | null;
	acknowledged_at_ms: number | null;
	acknowledged_by_user_id: string | null;
	/** Goes up with every change. */
	revision: Generated<number>;
}

interface AlarmEventTable {
	id: Generated<number>;
	alarm_id: number;
	at_ms: number;
	act: string;
	actor_user_id: string | null;
	reason: string | null;
	/** After the act */
	state: AlarmState;
}

interface IncidentTable {
	id: string;
	venue_id: number;
	robot_id: number;
	floor_id: number;
	zone_id: number | null;
	alarm_id: number | null;
	/** Halts with one cause share it, and one alarm. */
	cause_group: string;
	kind: HaltKind;
	verdict: Verdict;
	onset_ms: number;
	detected_ms: number;
	ended_ms: number | null;
	end_reason: string | null;
	x_m: number;
	y_m: number;
	heading_rad: number;
	density_per_m2: number | null;
	density_coverage: number | null;
	room_alone_m_s: number | null;
	room_shared_m_s: number | null;
	persons_within_2m: number | null;
	nearest_person_m: number | null;
	observed_share: number | null;
	flexibility_m_s: number | null;
	software: string | null;
	task_id: string | null;
	rule_set_id: number | null;
	evidence: Json | null;
}

interface DensityMinuteTable {
	floor_id: number;
	zone_id: number;
	minute_ms: number;
	mean_per_m2: number | null;
	peak_per_m2: number | null;
	/** Observed share of the zone's walkable floor over the minute, 0…1 */
	coverage: number;
	observed_m2_s: number;
	person_s: number;
}

interface ExposureMinuteTable {
	robot_id: number;
	floor_id: number;
	/** 0 outside all zones */
	zone_id: number;
	minute_ms: number;
	/** Density band, for example `0.2-0.5`, or `unseen` */
	band: string;
	tasked_s: number;
	moving_s: number;
	distance_m: number;
	halts: number;
}

interface RejectedMessageTable {
	id: Generated<number>;
	at_ms: number;
	topic: string;
	robot: string | null;
	reason: string;
	detail: string;
	/** First 512 bytes at most */
	payload: Uint8Array;
	/** Whole size as received */
	size_bytes: number;
}

interface RejectedCountTable {
	reason: string;
	/** '' when the sender is not known */
	robot: ColumnType<string, string | undefined, string>;
	day_ms: number;
	count: number;
}

interface SettingTable {
	key: string;
	value: Json;
}

export interface Database {
	venue: VenueTable;
	floor: FloorTable;
	floor_map: FloorMapTable;
	zone: ZoneTable;
	robot_model: RobotModelTable;
	robot: RobotTable;
	robot_credential: RobotCredentialTable;
	rule_set: RuleSetTable;
	user: UserTable;
	session: SessionTable;
	api_token: ApiTokenTable;
	audit_event: AuditEventTable;
	alarm: AlarmTable;
	alarm_event: AlarmEventTable;
	incident: IncidentTable;
	density_minute: DensityMinuteTable;
	exposure_minute: ExposureMinuteTable;
	rejected_message: RejectedMessageTable;
	rejected_count: RejectedCountTable;
	setting: SettingTable;
}

/** A row as read, for example `Row<'alarm'>`. */
export type Row<Table extends keyof Database> = Selectable<Database[Table]>;
/** A row to insert. */
export type NewRow<Table extends keyof Database> = Insertable<Database[Table]>;
