/** Incidents as lists and one by one. */

import { sql, type Kysely } from 'kysely';
import type { Incident, IncidentDetail } from '../../contracts/api.ts';
import type { HaltKind, Verdict } from '../../contracts/live.ts';
import type { Database } from '../db/schema.ts';

export interface IncidentFilter {
	readonly state?: 'open' | 'closed' | undefined;
	/** Keys */
	readonly floor?: string | undefined;
	readonly robot?: string | undefined;
	readonly kind?: HaltKind | undefined;
	readonly verdict?: Verdict | undefined;
	/** Onset from (inclusive) and to (exclusive), ms since the epoch */
	readonly fromMs?: number | undefined;
	readonly toMs?: number | undefined;
	/** Within a radius of a place, metres, inclusive; says little without `floor` */
	readonly near?: { readonly x: number; readonly y: number; readonly radius: number } | undefined;
	/** Only incidents that come after this one in the list */
	readonly after?: { readonly atMs: number; readonly id: string } | undefined;
}

/** Incidents that pass every part of the filter, newest onset first, then by descending id; at most `limit`. */
export async function readIncidents(db: Kysely<Database>, filter: IncidentFilter, limit: number): Promise<Incident[]> {
	const { state, floor, robot, kind, verdict, fromMs, toMs, near, after } = filter;
	let query = incidents(db);
	if (state !== undefined) query = query.where('incident.ended_ms', state === 'open' ? 'is' : 'is not', null);
	if (floor !== undefined) query = query.where('floor.key', '=', floor);
	if (robot !== undefined) query = query.where('robot.key', '=', robot);
	if (kind !== undefined) query = query.where('incident.kind', '=', kind);
	if (verdict !== undefined) query = query.where('incident.verdict', '=', verdict);
	if (fromMs !== undefined) query = query.where('incident.onset_ms', '>=', fromMs);
	if (toMs !== undefined) query = query.where('incident.onset_ms', '<', toMs);
	if (near !== undefined) {
		const { x, y, radius } = near;
		const dx = sql`(incident.x_m - ${x})`;
		const dy = sql`(incident.y_m - ${y})`;
		query = query.where(sql<boolean>`${dx} * ${dx} + ${dy} * ${dy} <= ${radius * radius}`);
	}
	if (after !== undefined) {
		query = query.where(({ eb, refTuple, tuple }) =>
			eb(refTuple('incident.onset_ms', 'incident.id'), '<', tuple(after.atMs, after.id))
		);
	}
	return query.orderBy('incident.onset_ms', 'desc').orderBy('incident.id', 'desc').limit(limit).execute();
}

/** One incident with its evidence. */
export async function readIncident(db: Kysely<Database>, id: string): Promise<IncidentDetail | undefined> {
	const row = await incidents(db).select('incident.evidence').where('incident.id', '=', id).executeTakeFirst();
	if (row === undefined) return undefined;
	// The column's CHECK says that it is JSON.
	return { ...row, evidence: row.evidence === null ? null : (JSON.parse(row.evidence) as unknown) };
}

const incidents = (db: Kysely<Database>) =>
	db
		.selectFrom('incident')
		.innerJoin('venue', 'venue.id', 'incident.venue_id')
		.innerJoin('floor', 'floor.id', 'incident.floor_id')
		.innerJoin('robot', 'robot.id', 'incident.robot_id')
		.innerJoin('robot_model', 'robot_model.id', 'robot.model_id')
		.leftJoin('zone', 'zone.id', 'incident.zone_id')
		.select(['incident.id', 'venue.key as venue', 'floor.key as floor', 'zone.key as zone', 'zone.name as zone_name'])
		.select(['robot.key as robot', 'robot.mark', 'robot_model.key as model'])
		.select(['incident.alarm_id', 'incident.cause_group', 'incident.kind', 'incident.verdict'])
		.select(['incident.onset_ms', 'incident.detected_ms', 'incident.ended_ms', 'incident.end_reason'])
		.select(['incident.x_m', 'incident.y_m', 'incident.heading_rad'])
		.select(['incident.density_per_m2', 'incident.density_coverage'])
		.select(['incident.room_alone_m_s', 'incident.room_shared_m_s'])
		.select(['incident.persons_within_2m', 'incident.nearest_person_m', 'incident.observed_share'])
		.select(['incident.flexibility_m_s', 'incident.software', 'incident.task_id']);
