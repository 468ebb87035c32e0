/** Databases and rows for tests. Everything in them is invented. */

import type { Kysely } from 'kysely';
import { randomUUID } from 'node:crypto';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { LiveFrame, LiveRobot } from '../../src/lib/contracts/live.ts';
import { openDatabase, type OpenDatabase } from '../../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import type { Database, NewRow, Role } from '../../src/lib/server/db/schema.ts';
import { insertFloor } from '../../src/lib/server/repositories/floors.ts';

export const T0 = 1_790_000_000_000;

/** A migrated, empty database, made once per test file. */
let template: Promise<Buffer> | undefined;

async function makeTemplate(): Promise<Buffer> {
	const { db, raw, close } = openDatabase(':memory:');
	await migrateToLatest(db);
	const bytes = raw.serialize();
	await close();
	return bytes;
}

/** A migrated database on a real file in a folder of its own; `remove` closes it and deletes the folder. */
export async function fileDatabase(): Promise<OpenDatabase & { path: string; remove(): Promise<void> }> {
	const folder = mkdtempSync(join(tmpdir(), 'elbowroom-'));
	const path = join(folder, 'test.db');
	writeFileSync(path, await (template ??= makeTemplate()));
	const open = openDatabase(path);
	const remove = async () => {
		await open.close();
		rmSync(folder, { recursive: true, force: true });
	};
	return { ...open, path, remove };
}

export interface Site {
	readonly venueId: number;
	readonly floorId: number;
	readonly zoneId: number;
	readonly robotIds: readonly number[];
}

/** One venue with one floor `quay-ground`, one zone `hall` and three robots `porter-1` … `porter-3`. */
export async function insertSite(db: Kysely<Database>): Promise<Site> {
	const { id: venueId } = await db
		.insertInto('venue')
		.values({ key: 'quay', name: 'Quay House', town: 'Pellmouth', time_zone: 'Europe/London' })
		.returning('id')
		.executeTakeFirstOrThrow();
	const outer: [number, number][] = [
		[0, 0],
		[20, 0],
		[20, 10],
		[0, 10]
	];
	const floorId = await insertFloor(db, {
		venueId,
		sort: 0,
		nowMs: T0,
		labels: [{ text: 'Door', x: 0, y: 5 }],
		floor: {
			key: 'quay-ground',
			name: 'Ground',
			walkable: { outer, holes: [] },
			walls: [{ ax: 5, ay: 0, bx: 5, by: 4 }],
			edgesBlockSight: true,
			zones: [
				{
					key: 'hall',
					name: 'Hall',
					polygon: { outer, holes: [] },
					scheme: 'fruin_walkway',
					threshold: 1.5,
					private: false
				}
			],
			waitingPlaces: [{ x: 1, y: 1, radius: 0.5 }],
			maps: { 'robot-map': { scale: 1, rotation: 0.5, tx: 3, ty: -2 } }
		}
	});
	const zone = await db.selectFrom('zone').select('id').where('floor_id', '=', floorId).executeTakeFirstOrThrow();
	const model = await db
		.insertInto('robot_model')
		.values({
			key: 'porter',
			name: 'Porter',
			letter: 'P',
			length_m: 0.9,
			width_m: 0.6,
			radius_m: 0.55,
			max_speed_m_s: 1.2
		})
		.returning('id')
		.executeTakeFirstOrThrow();
	const robotIds: number[] = [];
	for (const n of [1, 2, 3]) {
		const robot = await db
			.insertInto('robot')
			.values({ venue_id: venueId, key: `porter-${n}`, mark: `P${n}`, model_id: model.id })
			.returning('id')
			.executeTakeFirstOrThrow();
		robotIds.push(robot.id);
	}
	return { venueId, floorId, zoneId: zone.id, robotIds };
}

/** An incident at T0 of the first robot, but for what `change` says. */
export async function insertTestIncident(
	db: Kysely<Database>,
	site: Site,
	change: Partial<NewRow<'incident'>> & { id: string }
): Promise<void> {
	await db
		.insertInto('incident')
		.values({
			venue_id: site.venueId,
			robot_id: site.robotIds[0]!,
			floor_id: site.floorId,
			zone_id: site.zoneId,
			cause_group: change.id,
			kind: 'freeze',
			verdict: 'packed',
			onset_ms: T0,
			detected_ms: T0 + 8000,
			x_m: 2,
			y_m: 3,
			heading_rad: 0,
			...change
		})
		.execute();
}

/** A person who cannot sign in: the hash is none. */
export async function insertTestUser(db: Kysely<Database>, role: Role, name: string = role) {
	return db
		.insertInto('user')
		.values({
			id: randomUUID(),
			email: `${name}@example.org`,
			name,
			role,
			password_hash: 'none',
			created_at_ms: T0,
			disabled_at_ms: null
		})
		.returningAll()
		.executeTakeFirstOrThrow();
}

export const liveRobot = (key: string, change: Partial<LiveRobot> = {}): LiveRobot => ({
	key,
	mark: key.toUpperCase(),
	model: 'porter',
	x_m: 1,
	y_m: 2,
	heading_rad: 0,
	speed_m_s: 0.5,
	condition: 'working',
	pose_age_ms: 100,
	link: 'online',
	localized: true,
	tasked: true,
	battery: 0.8,
	goal: null,
	zone: null,
	density_per_m2: null,
	room_alone_m_s: null,
	room_shared_m_s: null,
	clock_offset_ms: 3,
	incident: null,
	software: '1.0',
	errors: [],
	...change
});

export const liveFrame = (change: Partial<LiveFrame> = {}): LiveFrame => ({
	floor: 'quay-ground',
	venue: 'quay',
	server_time_ms: T0,
	robots: [],
	persons: [],
	zones: [],
	halts: [],
	observed_m2: 0,
	coverage: 0,
	flexibility: { value_m_s: 0.3, n: 0, learned: false, noise_floor_m_s: 0.2 },
	...change
});
