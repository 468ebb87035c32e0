/** What the engine thread needs from the database: every venue with its floors, robots and halts left open. */

import type { Kysely } from 'kysely';
import { z } from 'zod';
import type { Moment, OpenHalt } from '../../domain/engine/robot-view.ts';
import { DEFAULT_RULES } from '../../domain/engine/rules.ts';
import { createVenueContext, type VenueContext } from '../../domain/engine/venue-engine.ts';
import { secondsFromMs } from '../../domain/units.ts';
import type { Database } from '../db/schema.ts';
import { readFloors, type StoredFloor } from '../repositories/floors.ts';
import { readOpenHaltRows } from '../repositories/halts.ts';
import { readResiduals } from '../repositories/residuals.ts';
import { readRobots } from '../repositories/robots.ts';

/** One venue with the row ids its events are stored under. */
export interface Site {
	readonly id: number;
	readonly key: string;
	readonly context: VenueContext;
	/** By floor key */
	readonly floors: ReadonlyMap<string, StoredFloor>;
	/** Robot key → row id */
	readonly robotIds: ReadonlyMap<string, number>;
	/** Robot key → mark on the plan */
	readonly marks: ReadonlyMap<string, string>;
	/** Halts left open by an earlier run, by floor key */
	readonly openHalts: ReadonlyMap<string, readonly OpenHalt[]>;
	/** What was learned about how people give way, m/s, by floor key */
	readonly residuals: ReadonlyMap<string, readonly number[]>;
}

/** Venues named by key, all when none is named; those without a floor are left out. */
export async function readSites(db: Kysely<Database>, venues: readonly string[]): Promise<Site[]> {
	const floors = await readFloors(db, venues);
	const robots = await readRobots(db, venues);
	const open = await readOpenHaltRows(db);
	const learned = await readResiduals(db);
	const sites: Site[] = [];
	for (const [key, own] of groupBy(floors, ({ venue }) => venue.key)) {
		const { id } = own[0]!.venue;
		const fleet = robots.filter(({ venueId }) => venueId === id);
		const openHalts = new Map(
			own.map((stored) => [
				stored.floor.key,
				open.filter(({ floor_id }) => floor_id === stored.id).map((row) => openHaltFrom(row))
			])
		);
		sites.push({
			id,
			key,
			context: createVenueContext(
				key,
				own.map(({ floor }) => floor),
				fleet.map(({ robot }) => robot),
				DEFAULT_RULES
			),
			floors: new Map(own.map((stored) => [stored.floor.key, stored])),
			robotIds: new Map(fleet.map(({ id: robotId, robot }) => [robot.key, robotId])),
			marks: new Map(fleet.map(({ robot }) => [robot.key, robot.mark])),
			openHalts,
			residuals: new Map(
				own.flatMap(({ floor }) => {
					const residuals = learned.get(floor.key);
					return residuals ? [[floor.key, residuals] as const] : [];
				})
			)
		});
	}
	return sites;
}

type OpenHaltRow = Awaited<ReturnType<typeof readOpenHaltRows>>[number];

const MomentJson = z.looseObject({ time: z.number(), verdict: z.string() });
const EvidenceJson = z.object({ before: MomentJson.nullable(), at: MomentJson.nullable() });

function openHaltFrom(row: OpenHaltRow): OpenHalt {
	const evidence = row.evidence === null ? null : EvidenceJson.safeParse(JSON.parse(row.evidence)).data;
	return {
		incident: row.id,
		robot: row.robot,
		kind: row.kind,
		verdict: row.verdict,
		onset: secondsFromMs(row.onset_ms),
		detectedAt: secondsFromMs(row.detected_ms),
		x: row.x_m,
		y: row.y_m,
		heading: row.heading_rad,
		zone: row.zone,
		causeGroup: row.cause_group,
		before: (evidence?.before ?? null) as Moment | null,
		at: (evidence?.at ?? null) as Moment | null,
		taskId: row.task_id,
		software: row.software
	};
}

function groupBy<Item>(items: readonly Item[], keyOf: (item: Item) => string): Map<string, Item[]> {
	const groups = new Map<string, Item[]>();
	for (const item of items) {
		const key = keyOf(item);
		const group = groups.get(key);
		if (group) group.push(item);
		else groups.set(key, [item]);
	}
	return groups;
}
