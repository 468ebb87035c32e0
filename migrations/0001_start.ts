/** First tables. STRICT, so that a wrong type is an error and not a surprise; times are ms since the epoch. */

import { sql, type Migration } from 'kysely';

const TABLES = [
	`CREATE TABLE venue (
		id INTEGER PRIMARY KEY,
		key TEXT NOT NULL UNIQUE,
		name TEXT NOT NULL,
		town TEXT NOT NULL,
		time_zone TEXT NOT NULL
	) STRICT`,

	`CREATE TABLE floor (
		id INTEGER PRIMARY KEY,
		venue_id INTEGER NOT NULL REFERENCES venue (id),
		key TEXT NOT NULL UNIQUE,
		name TEXT NOT NULL,
		sort INTEGER NOT NULL DEFAULT 0,
		plan TEXT NOT NULL CHECK (json_valid(plan)),
		created_at_ms INTEGER NOT NULL
	) STRICT`,
	`CREATE INDEX floor_by_venue ON floor (venue_id, sort)`,

	`CREATE TABLE floor_map (
		id INTEGER PRIMARY KEY,
		floor_id INTEGER NOT NULL REFERENCES floor (id) ON DELETE CASCADE,
		map TEXT NOT NULL,
		scale REAL NOT NULL CHECK (scale > 0),
		rotation_rad REAL NOT NULL,
		tx_m REAL NOT NULL,
		ty_m REAL NOT NULL,
		UNIQUE (floor_id, map)
	) STRICT`,

	`CREATE TABLE zone (
		id INTEGER PRIMARY KEY,
		floor_id INTEGER NOT NULL REFERENCES floor (id) ON DELETE CASCADE,
		key TEXT NOT NULL,
		name TEXT NOT NULL,
		polygon TEXT NOT NULL CHECK (json_valid(polygon)),
		scheme TEXT NOT NULL,
		threshold_per_m2 REAL CHECK (threshold_per_m2 > 0),
		private INTEGER NOT NULL DEFAULT 0 CHECK (private IN (0, 1)),
		UNIQUE (floor_id, key)
	) STRICT`,

	`CREATE TABLE robot_model (
		id INTEGER PRIMARY KEY,
		key TEXT NOT NULL UNIQUE,
		name TEXT NOT NULL,
		letter TEXT NOT NULL CHECK (length(letter) = 1),
		length_m REAL NOT NULL CHECK (length_m > 0),
		width_m REAL NOT NULL CHECK (width_m > 0),
		radius_m REAL NOT NULL CHECK (radius_m > 0),
		max_speed_m_s REAL NOT NULL CHECK (max_speed_m_s > 0)
	) STRICT`,

	`CREATE TABLE robot (
		id INTEGER PRIMARY KEY,
		venue_id INTEGER NOT NULL REFERENCES venue (id),
		key TEXT NOT NULL,
		mark TEXT NOT NULL,
		model_id INTEGER NOT NULL REFERENCES robot_model (id),
		retired_at_ms INTEGER,
		UNIQUE (venue_id, key)
	) STRICT`,

	`CREATE TABLE robot_credential (
		id INTEGER PRIMARY KEY,
		robot_id INTEGER NOT NULL REFERENCES robot (id) ON DELETE CASCADE,
		password_hash TEXT NOT NULL,
		mosquitto_hash TEXT,
		created_at_ms INTEGER NOT NULL,
		revoked_at_ms INTEGER
	) STRICT`,
	`CREATE INDEX robot_credential_by_robot ON robot_credential (robot_id)`,

	`CREATE TABLE rule_set (
		id INTEGER PRIMARY KEY,
		venue_id INTEGER REFERENCES venue (id),
		version INTEGER NOT NULL,
		rules TEXT NOT NULL CHECK (json_valid(rules)),
		published_at_ms INTEGER NOT NULL,
		reason TEXT NOT NULL,
		UNIQUE (venue_id, version)
	) STRICT`,

	`CREATE TABLE user (
		id TEXT PRIMARY KEY NOT NULL,
		email TEXT NOT NULL UNIQUE COLLATE NOCASE,
		name TEXT NOT NULL,
		role TEXT NOT NULL CHECK (role IN ('display', 'operator', 'maintainer', 'manager', 'admin')),
		password_hash TEXT NOT NULL,
		created_at_ms INTEGER NOT NULL,
		disabled_at_ms INTEGER
	) STRICT`,

	// The id is the SHA-256 of the token, so a copied database opens no session.
	`CREATE TABLE session (
		id TEXT PRIMARY KEY NOT NULL CHECK (length(id) = 64),
		user_id TEXT NOT NULL REFERENCES user (id) ON DELETE CASCADE,
		created_at_ms INTEGER NOT NULL,
		expires_at_ms INTEGER NOT NULL
	) STRICT`,
	`CREATE INDEX session_by_user ON session (user_id)`,
	`CREATE INDEX session_by_expiry ON session (expires_at_ms)`,

	`CREATE TABLE api_token (
		id INTEGER PRIMARY KEY,
		user_id TEXT NOT NULL REFERENCES user (id) ON DELETE CASCADE,
		name TEXT NOT NULL,
		token_hash TEXT NOT NULL UNIQUE CHECK (length(token_hash) = 64),
		role TEXT NOT NULL CHECK (role IN ('display', 'operator', 'maintainer', 'manager', 'admin')),
		created_at_ms INTEGER NOT NULL,
		last_used_at_ms INTEGER,
		revoked_at_ms INTEGER
	) STRICT`,
	`CREATE INDEX api_token_by_user ON api_token (user_id)`,

	`CREATE TABLE audit_event (
		id INTEGER PRIMARY KEY,
		at_ms INTEGER NOT NULL,
		actor_user_id TEXT REFERENCES user (id),
		act TEXT NOT NULL,
		subject TEXT NOT NULL,
		detail TEXT NOT NULL DEFAULT '{}' CHECK (json_valid(detail))
	) STRICT`,
	`CREATE INDEX audit_event_by_time ON audit_event (at_ms)`,

	`CREATE TABLE alarm (
		id INTEGER PRIMARY KEY,
		venue_id INTEGER NOT NULL REFERENCES venue (id),
		dedupe_key TEXT NOT NULL,
		type TEXT NOT NULL CHECK (type IN ('freeze', 'stall', 'dither', 'fault', 'silent', 'ingest', 'duplicate_credential')),
		priority TEXT NOT NULL CHECK (priority IN ('high', 'medium', 'low')),
		state TEXT NOT NULL CHECK (state IN ('unacknowledged', 'acknowledged', 'returned', 'cleared')),
		floor_id INTEGER REFERENCES floor (id),
		zone_id INTEGER REFERENCES zone (id) ON DELETE SET NULL,
		place TEXT NOT NULL,
		what TEXT NOT NULL,
		action TEXT NOT NULL,
		x_m REAL,
		y_m REAL,
		onset_ms INTEGER NOT NULL,
		raised_at_ms INTEGER NOT NULL,
		returned_at_ms INTEGER,
		acknowledged_at_ms INTEGER,
		acknowledged_by_user_id TEXT REFERENCES user (id),
		revision INTEGER NOT NULL DEFAULT 1
	) STRICT`,
	// One live alarm per cause; once cleared, the same cause may raise a new one.
	`CREATE UNIQUE INDEX alarm_live ON alarm (venue_id, dedupe_key) WHERE state <> 'cleared'`,
	`CREATE INDEX alarm_by_time ON alarm (raised_at_ms, id)`,

	`CREATE TABLE alarm_event (
		id INTEGER PRIMARY KEY,
		alarm_id INTEGER NOT NULL REFERENCES alarm (id) ON DELETE CASCADE,
		at_ms INTEGER NOT NULL,
		act TEXT NOT NULL,
		actor_user_id TEXT REFERENCES user (id),
		reason TEXT,
		state TEXT NOT NULL CHECK (state IN ('unacknowledged', 'acknowledged', 'returned', 'cleared'))
	) STRICT`,
	`CREATE INDEX alarm_event_by_alarm ON alarm_event (alarm_id, at_ms)`,
	`CREATE INDEX alarm_event_by_time ON alarm_event (at_ms)`,

	`CREATE TABLE incident (
		id TEXT PRIMARY KEY NOT NULL,
		venue_id INTEGER NOT NULL REFERENCES venue (id),
		robot_id INTEGER NOT NULL REFERENCES robot (id),
		floor_id INTEGER NOT NULL REFERENCES floor (id),
		zone_id INTEGER REFERENCES zone (id) ON DELETE SET NULL,
		alarm_id INTEGER REFERENCES alarm (id) ON DELETE SET NULL,
		cause_group TEXT NOT NULL,
		kind TEXT NOT NULL CHECK (kind IN ('freeze', 'stall', 'dither', 'fault', 'silent')),
		verdict TEXT NOT NULL CHECK (verdict IN ('open', 'shared', 'packed', 'unseen')),
		onset_ms INTEGER NOT NULL,
		detected_ms INTEGER NOT NULL,
		ended_ms INTEGER,
		end_reason TEXT,
		x_m REAL NOT NULL,
		y_m REAL NOT NULL,
		heading_rad REAL NOT NULL,
		density_per_m2 REAL,
		density_coverage REAL,
		room_alone_m_s REAL,
		room_shared_m_s REAL,
		persons_within_2m INTEGER,
		nearest_person_m REAL,
		observed_share REAL,
		flexibility_m_s REAL,
		software TEXT,
		task_id TEXT,
		rule_set_id INTEGER REFERENCES rule_set (id),
		evidence TEXT CHECK (json_valid(evidence))
	) STRICT`,
	`CREATE INDEX incident_by_onset ON incident (onset_ms, id)`,
	`CREATE INDEX incident_by_floor ON incident (floor_id, onset_ms, id)`,
	`CREATE INDEX incident_by_robot ON incident (robot_id, onset_ms, id)`,
	`CREATE INDEX incident_by_alarm ON incident (alarm_id) WHERE alarm_id IS NOT NULL`,
	`CREATE INDEX incident_open ON incident (onset_ms, id) WHERE ended_ms IS NULL`,

	`CREATE TABLE density_minute (
		floor_id INTEGER NOT NULL REFERENCES floor (id),
		zone_id INTEGER NOT NULL REFERENCES zone (id) ON DELETE CASCADE,
		minute_ms INTEGER NOT NULL CHECK (minute_ms % 60000 = 0),
		mean_per_m2 REAL,
		peak_per_m2 REAL,
		coverage REAL NOT NULL CHECK (coverage BETWEEN 0 AND 1),
		observed_m2_s REAL NOT NULL,
		person_s REAL NOT NULL,
		PRIMARY KEY (zone_id, minute_ms)
	) STRICT, WITHOUT ROWID`,

	// Time leads the key: a week of all robots is one contiguous read, and new minutes land on one page.
	// zone_id 0 means outside all zones, which is why it is no foreign key.
	`CREATE TABLE exposure_minute (
		robot_id INTEGER NOT NULL REFERENCES robot (id),
		floor_id INTEGER NOT NULL REFERENCES floor (id),
		zone_id INTEGER NOT NULL,
		minute_ms INTEGER NOT NULL CHECK (minute_ms % 60000 = 0),
		band TEXT NOT NULL,
		tasked_s REAL NOT NULL,
		moving_s REAL NOT NULL,
		distance_m REAL NOT NULL,
		halts INTEGER NOT NULL,
		PRIMARY KEY (minute_ms, robot_id, floor_id, zone_id, band)
	) STRICT, WITHOUT ROWID`,

	`CREATE TABLE rejected_message (
		id INTEGER PRIMARY KEY,
		at_ms INTEGER NOT NULL,
		topic TEXT NOT NULL,
		robot TEXT,
		reason TEXT NOT NULL,
		detail TEXT NOT NULL,
		payload BLOB NOT NULL CHECK (length(payload) <= 512),
		size_bytes INTEGER NOT NULL
	) STRICT`,
	`CREATE INDEX rejected_message_by_time ON rejected_message (at_ms)`,

	// robot is '' when the sender is not known: NULL would make every row its own key.
	`CREATE TABLE rejected_count (
		reason TEXT NOT NULL,
		robot TEXT NOT NULL DEFAULT '',
		day_ms INTEGER NOT NULL CHECK (day_ms % 86400000 = 0),
		count INTEGER NOT NULL,
		PRIMARY KEY (reason, robot, day_ms)
	) STRICT, WITHOUT ROWID`,

	`CREATE TABLE setting (
		key TEXT PRIMARY KEY NOT NULL,
		value TEXT NOT NULL CHECK (json_valid(value))
	) STRICT, WITHOUT ROWID`
];

export const start: Migration = {
	async up(db) {
		for (const statement of TABLES) await sql.raw(statement).execute(db);
	}
};
