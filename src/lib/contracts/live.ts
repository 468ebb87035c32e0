/** What a browser or an API client hears about a floor. Units and ages in the names; null is "not measured" or "not known", never zero. */

export type HaltKind = 'freeze' | 'stall' | 'dither' | 'fault' | 'silent';
export type Verdict = 'open' | 'shared' | 'packed' | 'unseen';
export type Condition =
	'working' | 'idle' | 'waiting' | 'paused' | 'charging' | 'manual' | 'halted' | 'fault' | 'silent';
export type Level = 'A' | 'B' | 'C' | 'D' | 'E' | 'F';

export interface LiveRobot {
	readonly key: string;
	readonly mark: string;
	readonly model: string;
	/** m, floor frame; null before the first pose on this floor */
	readonly x_m: number | null;
	readonly y_m: number | null;
	readonly heading_rad: number | null;
	readonly speed_m_s: number | null;
	readonly condition: Condition;
	/** Age of the last pose at `server_time_ms`; null when none was ever received. */
	readonly pose_age_ms: number | null;
	readonly link: 'online' | 'offline' | 'lost' | 'unknown';
	readonly localized: boolean | null;
	readonly tasked: boolean | null;
	readonly battery: number | null;
	readonly goal: { readonly x_m: number; readonly y_m: number } | null;
	/** Zone the robot is in, by key */
	readonly zone: string | null;
	/** persons/m² around the robot; null when too little floor was observed */
	readonly density_per_m2: number | null;
	/** m/s toward the goal; null when not evaluated */
	readonly room_alone_m_s: number | null;
	readonly room_shared_m_s: number | null;
	/** Robot clock minus server clock, ms; null before it can be said */
	readonly clock_offset_ms: number | null;
	/** Identifier of the open incident, if any */
	readonly incident: string | null;
	readonly software: string | null;
	readonly errors: readonly { readonly code: string; readonly level: string; readonly text: string }[];
}

/** A person as a point. Ids live only as long as the live track and are never stored. */
export interface LivePerson {
	readonly id: number;
	readonly x_m: number;
	readonly y_m: number;
	readonly vx_m_s: number;
	readonly vy_m_s: number;
	/** Number of robots that see this person now */
	readonly seen_by: number;
	readonly age_ms: number;
}

export interface LiveZone {
	readonly key: string;
	readonly name: string;
	/** persons/m² by Voronoi cells with cut-off; null below the least coverage */
	readonly density_per_m2: number | null;
	/** persons/m², count over observed area; null below the least coverage */
	readonly classic_per_m2: number | null;
	/** Observed share of the walkable floor in the zone, 0…1 */
	readonly coverage: number;
	readonly observed_m2: number;
	readonly persons: number;
	readonly level: Level | null;
	/** Which level-of-service table `level` comes from */
	readonly scheme: string;
	readonly threshold_per_m2: number | null;
	readonly above_threshold: boolean;
	readonly private: boolean;
}

export interface LiveHalt {
	readonly incident: string;
	readonly robot: string;
	readonly kind: HaltKind;
	readonly verdict: Verdict;
	readonly onset_ms: number;
	readonly detected_ms: number;
	readonly x_m: number;
	readonly y_m: number;
	readonly zone: string | null;
	readonly density_per_m2: number | null;
	readonly coverage: number | null;
	readonly room_alone_m_s: number | null;
	readonly room_shared_m_s: number | null;
	readonly persons_within_2m: number | null;
	readonly nearest_person_m: number | null;
	/** Alarm this halt belongs to; several halts of one cause group share one. */
	readonly cause_group: string;
}

/** One floor at one moment. */
export interface LiveFrame {
	readonly floor: string;
	readonly venue: string;
	readonly server_time_ms: number;
	readonly robots: readonly LiveRobot[];
	readonly persons: readonly LivePerson[];
	readonly zones: readonly LiveZone[];
	readonly halts: readonly LiveHalt[];
	/** Total observed walkable floor, m², and its share of the walkable floor */
	readonly observed_m2: number;
	readonly coverage: number;
	/** What people of the venue give way by, as used for room shared */
	readonly flexibility: LiveFlexibility;
}

export interface LiveFlexibility {
	readonly value_m_s: number;
	/** Windows of tracks behind the value */
	readonly n: number;
	/** False while too few windows are known and the default is used */
	readonly learned: boolean;
	/** What tracker noise alone would give */
	readonly noise_floor_m_s: number;
}

/** Density field over the floor's grid, row by row from the lower left corner. */
export interface LiveField {
	readonly floor: string;
	readonly server_time_ms: number;
	readonly x0_m: number;
	readonly y0_m: number;
	readonly cell_m: number;
	readonly cols: number;
	readonly rows: number;
	/** persons/m² of the value 254; 255 marks cells nobody has seen in the window */
	readonly max_per_m2: number;
	/** Base64 of run lengths: pairs (value u8, run u8 1…255) */
	readonly cells: string;
}

export type AlarmPriority = 'high' | 'medium' | 'low';
export type AlarmState = 'unacknowledged' | 'acknowledged' | 'returned' | 'cleared';
export type AlarmType = HaltKind | 'ingest' | 'duplicate_credential';

export interface LiveAlarm {
	readonly id: number;
	readonly type: AlarmType;
	readonly priority: AlarmPriority;
	readonly state: AlarmState;
	readonly floor: string | null;
	readonly zone: string | null;
	/** Where, in words a person on the floor understands */
	readonly place: string;
	readonly what: string;
	readonly action: string;
	readonly x_m: number | null;
	readonly y_m: number | null;
	readonly raised_at_ms: number;
	readonly onset_ms: number;
	readonly returned_at_ms: number | null;
	readonly acknowledged_at_ms: number | null;
	readonly acknowledged_by: string | null;
	readonly robots: readonly string[];
	readonly incidents: readonly string[];
	readonly revision: number;
}

export interface LiveHealth {
	readonly server_time_ms: number;
	/** False while the broker cannot be reached */
	readonly broker: boolean;
	/** False while the engine thread is down or being restarted */
	readonly engine: boolean;
	/** False while the database refuses writes */
	readonly storage: boolean;
	/** Plain words for each trouble, worst first; empty when all is well */
	readonly troubles: readonly string[];
	readonly messages_per_s: number;
	readonly rejected_total: number;
	readonly last_message_age_ms: number | null;
}

/** Changes against the frame before it on the same stream. */
export interface LiveDelta {
	readonly server_time_ms: number;
	readonly robots: readonly LiveRobot[];
	readonly robots_gone: readonly string[];
	/** People move all the time, so they are always sent whole. */
	readonly persons: readonly LivePerson[];
	readonly zones: readonly LiveZone[];
	/** Present when any halt changed, then complete. */
	readonly halts?: readonly LiveHalt[];
	/** Present when it changed. */
	readonly flexibility?: LiveFlexibility;
	readonly observed_m2: number;
	readonly coverage: number;
}

export type LiveEvent =
	| {
			readonly event: 'snapshot';
			readonly data: {
				readonly frame: LiveFrame;
				readonly field: LiveField | null;
				readonly alarms: readonly LiveAlarm[];
				readonly health: LiveHealth;
			};
	  }
	| { readonly event: 'delta'; readonly data: LiveDelta }
	| { readonly event: 'field'; readonly data: LiveField }
	| { readonly event: 'alarm'; readonly data: LiveAlarm }
	| { readonly event: 'health'; readonly data: LiveHealth };
