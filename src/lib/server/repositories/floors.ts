/** Venues, floors and zones, between the tables and the domain's words. */

import type { Kysely } from 'kysely';
import { Failure } from '../../domain/failure.ts';
import { SCHEME_NAMES, type LevelOfServiceScheme } from '../../domain/density/level-of-service.ts';
import type { Floor, Zone } from '../../domain/floor.ts';
import type { Database, Row } from '../db/schema.ts';
import { PlanJson, PolygonJson } from './floor-plan.ts';

/** A floor with what is needed to store things about it. */
export interface StoredFloor {
	readonly id: number;
	readonly venue: Row<'venue'>;
	readonly sort: number;
	readonly floor: Floor;
	/** Zone key → row id */
	readonly zoneIds: Readonly<Record<string, number>>;
	readonly labels: readonly { readonly text: string; readonly x: number; readonly y: number }[];
}

/** Floors of the venues named by key (of all venues when none is named), in the order they are shown. */
export async function readFloors(db: Kysely<Database>, venues: readonly string[] = []): Promise<StoredFloor[]> {
	let query = db.selectFrom('floor').innerJoin('venue', 'venue.id', 'floor.venue_id').selectAll('floor');
	if (venues.length > 0) query = query.where('venue.key', 'in', venues);
	return assemble(db, await query.orderBy('venue.key').orderBy('floor.sort').orderBy('floor.key').execute());
}

/** One floor by its key. */
export async function readFloor(db: Kysely<Database>, key: string): Promise<StoredFloor | undefined> {
	const rows = await db.selectFrom('floor').selectAll().where('key', '=', key).execute();
	return (await assemble(db, rows))[0];
}

export const floorExists = async (db: Kysely<Database>, key: string): Promise<boolean> =>
	(await db.selectFrom('floor').select('id').where('key', '=', key).executeTakeFirst()) !== undefined;

/** Names of all floors with their venues, in the order they are shown; at most `limit` of them. */
export async function listFloors(db: Kysely<Database>, limit = 500) {
	return db
		.selectFrom('floor')
		.innerJoin('venue', 'venue.id', 'floor.venue_id')
		.select(['floor.key', 'floor.name', 'floor.sort'])
		.select(['venue.key as venue_key', 'venue.name as venue_name', 'venue.town', 'venue.time_zone'])
		.orderBy('venue.key')
		.orderBy('floor.sort')
		.orderBy('floor.key')
		.limit(limit)
		.execute();
}

/** Stores a new floor with its zones and maps and returns its id. Pass a transaction: it is several rows. */
export async function insertFloor(
	db: Kysely<Database>,
	{
		venueId,
		floor,
		sort,
		nowMs,
		labels
	}: {
		venueId: number;
		floor: Floor;
		sort: number;
		nowMs: number;
		labels?: StoredFloor['labels'];
	}
): Promise<number> {
	const { id } = await db
		.insertInto('floor')
		.values({
			venue_id: venueId,
			key: floor.key,
			name: floor.name,
			sort,
			plan: planText(floor, labels),
			created_at_ms: nowMs
		})
		.returning('id')
		.executeTakeFirstOrThrow();
	for (const zone of floor.zones) {
		await db
			.insertInto('zone')
			.values({
				floor_id: id,
				key: zone.key,
				name: zone.name,
				polygon: JSON.stringify(PolygonJson.parse(zone.polygon)),
				scheme: zone.scheme,
				threshold_per_m2: zone.threshold,
				private: zone.private ? 1 : 0
			})
			.execute();
	}
	for (const [map, { scale, rotation, tx, ty }] of Object.entries(floor.maps)) {
		await db
			.insertInto('floor_map')
			.values({ floor_id: id, map, scale, rotation_rad: rotation, tx_m: tx, ty_m: ty })
			.execute();
	}
	return id;
}

function planText(floor: Floor, labels: StoredFloor['labels'] | undefined): string {
	const plan: unknown = {
		walkable: floor.walkable,
		walls: floor.walls,
		edges_block_sight: floor.edgesBlockSight,
		waiting_places: floor.waitingPlaces,
		...(labels === undefined ? {} : { labels })
	};
	return JSON.stringify(PlanJson.parse(plan));
}

async function assemble(db: Kysely<Database>, rows: readonly Row<'floor'>[]): Promise<StoredFloor[]> {
	if (rows.length === 0) return [];
	const ids = rows.map(({ id }) => id);
	const venues = new Map((await db.selectFrom('venue').selectAll().execute()).map((venue) => [venue.id, venue]));
	const zones = await db.selectFrom('zone').selectAll().where('floor_id', 'in', ids).orderBy('id').execute();
	const maps = await db.selectFrom('floor_map').selectAll().where('floor_id', 'in', ids).execute();
	return rows.map((row) => {
		const own = zones.filter(({ floor_id }) => floor_id === row.id);
		const plan = parseColumn(() => PlanJson.parse(JSON.parse(row.plan)), `the plan of floor ${row.key}`);
		return {
			id: row.id,
			// The foreign key says it is there.
			venue: venues.get(row.venue_id)!,
			sort: row.sort,
			zoneIds: Object.fromEntries(own.map(({ key, id }) => [key, id])),
			labels: plan.labels ?? [],
			floor: {
				key: row.key,
				name: row.name,
				walkable: plan.walkable,
				walls: plan.walls,
				edgesBlockSight: plan.edges_block_sight,
				waitingPlaces: plan.waiting_places,
				zones: own.map(zoneFrom),
				maps: Object.fromEntries(
					maps
						.filter(({ floor_id }) => floor_id === row.id)
						.map(({ map, scale, rotation_rad, tx_m, ty_m }) => [
							map,
							{ scale, rotation: rotation_rad, tx: tx_m, ty: ty_m }
						])
				)
			}
		};
	});
}

function zoneFrom(row: Row<'zone'>): Zone {
	return {
		key: row.key,
		name: row.name,
		polygon: parseColumn(() => PolygonJson.parse(JSON.parse(row.polygon)), `the outline of zone ${row.key}`),
		scheme: schemeFrom(row),
		threshold: row.threshold_per_m2,
		private: row.private === 1
	};
}

function schemeFrom({ key, scheme }: Row<'zone'>): LevelOfServiceScheme {
	const known = SCHEME_NAMES.find((name) => name === scheme);
	if (known === undefined) throw damaged(`the level-of-service scheme of zone ${key}`);
	return known;
}

function parseColumn<T>(parse: () => T, what: string): T {
	try {
		return parse();
	} catch (cause) {
		throw damaged(what, cause);
	}
}

const damaged = (what: string, cause?: unknown) =>
	new Failure('storage', `The database holds something unreadable: ${what}.`, undefined, { cause });
