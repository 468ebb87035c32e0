/** Invented weeks before the demo, so that reports and alarm lists have something to say. Written once. */

import type { Kysely } from 'kysely';
import type Sqlite from 'better-sqlite3';
import { computeArea } from '../../src/lib/domain/geometry/polygon.ts';
import { intersect } from '../../src/lib/domain/geometry/clipping.ts';
import type { Database } from '../../src/lib/server/db/schema.ts';
import { readFloors, type StoredFloor } from '../../src/lib/server/repositories/floors.ts';
import { createNavGrid, isInsideRing } from '../core/nav-grid.ts';
import { createRandom, type Random } from '../core/random.ts';
import type { FleetRobot, Venue } from '../venue/model.ts';
import { openDays } from './days.ts';
import { generateDay, type HistoryFloor, type HistoryRobot, type HistoryZone } from './generate.ts';
import { NEW_SOFTWARE_WEEK } from './law.ts';
import { createHistoryWriter } from './store.ts';

const SETTING = 'demo_history';

export interface HistorySummary {
	readonly days: number;
	readonly halts: number;
}

/**
 * Writes the weeks before `nowMs` for one venue, unless they have been written already: then null. A run that was cut short is
 * taken up where it stopped and gives the same rows.
 */
export async function seedHistory(
	{ db, raw }: { db: Kysely<Database>; raw: Sqlite.Database },
	{
		venue,
		venueId,
		fleet,
		seed,
		nowMs,
		weeks
	}: { venue: Venue; venueId: number; fleet: readonly FleetRobot[]; seed: number; nowMs: number; weeks: number }
): Promise<HistorySummary | null> {
	const progress = await readProgress(db, nowMs);
	if (progress.weeksDone >= weeks) return null;
	const random = createRandom(`history/${seed}`);
	const floors = (await readFloors(db, [venue.key])).map((stored) =>
		historyFloor(stored, random.fork(stored.floor.key))
	);
	const robots = await historyRobots(db, venueId, fleet);
	const operators = (
		await db.selectFrom('user').select('id').where('role', '=', 'operator').orderBy('id').execute()
	).map(({ id }) => id);
	const write = createHistoryWriter(raw, { venueId, venueKey: venue.key, operators });
	const days = openDays(progress.anchorMs, weeks, venue.timeZone, random.fork('days'));
	let halts = 0;
	for (let week = progress.weeksDone; week < weeks; week++) {
		const batch = days
			.filter((day) => day.week === week)
			.flatMap((day) =>
				floors.map((floor, f) => {
					const own = robots.filter((_, i) => fleet[i]!.floor === f);
					const stream = random.fork(`${floor.key}/${day.opensMs}`);
					return { floor, day: generateDay(day, floor, own, week >= NEW_SOFTWARE_WEEK, stream) };
				})
			);
		write(batch, SETTING, JSON.stringify({ ...progress, weeksDone: week + 1 } satisfies Progress));
		halts += batch.reduce((sum, { day }) => sum + day.halts.length, 0);
	}
	return { days: days.length, halts };
}

interface Progress {
	readonly anchorMs: number;
	readonly weeksDone: number;
}

async function readProgress(db: Kysely<Database>, nowMs: number): Promise<Progress> {
	const row = await db.selectFrom('setting').select('value').where('key', '=', SETTING).executeTakeFirst();
	return row ? (JSON.parse(row.value) as Progress) : { anchorMs: nowMs, weeksDone: 0 };
}

function historyFloor({ id, floor, zoneIds }: StoredFloor, random: Random): HistoryFloor {
	const grid = createNavGrid(floor, 0.6);
	const zones = floor.zones.map((zone): HistoryZone => {
		const { outer } = zone.polygon;
		const xs = outer.map(([x]) => x);
		const ys = outer.map(([, y]) => y);
		const points = [];
		for (let tries = 0; points.length < 60 && tries < 2000; tries++) {
			const x = random.between(Math.min(...xs), Math.max(...xs));
			const y = random.between(Math.min(...ys), Math.max(...ys));
			const at = grid.index(x, y);
			if (at >= 0 && grid.free[at] && isInsideRing(outer, x, y))
				points.push({ x: Number(x.toFixed(2)), y: Number(y.toFixed(2)) });
		}
		const area = computeArea(intersect([zone.polygon], [floor.walkable]));
		return { id: zoneIds[zone.key]!, key: zone.key, name: zone.name, area, private: zone.private, points };
	});
	return { id, key: floor.key, name: floor.name, zones: zones.filter(({ points }) => points.length > 0) };
}

async function historyRobots(
	db: Kysely<Database>,
	venueId: number,
	fleet: readonly FleetRobot[]
): Promise<HistoryRobot[]> {
	const rows = await db.selectFrom('robot').select(['id', 'key']).where('venue_id', '=', venueId).execute();
	const ids = new Map(rows.map(({ key, id }) => [key, id]));
	return fleet.map(({ key, mark, model, planner }) => ({
		id: ids.get(key)!,
		key,
		mark,
		model: model.key,
		maxSpeed: model.maxSpeed,
		early: planner === 'counting'
	}));
}
