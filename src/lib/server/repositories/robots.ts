/** Robots and their models. */

import type { Kysely } from 'kysely';
import type { Robot } from '../../domain/floor.ts';
import type { Database } from '../db/schema.ts';

/** A robot with what is needed to store things about it. */
export interface StoredRobot {
	readonly id: number;
	readonly venueId: number;
	/** Key of the venue */
	readonly venue: string;
	readonly robot: Robot;
}

/** Robots in service of the venues named by key (of all venues when none is named), by venue and key; at most `limit`. */
export async function readRobots(
	db: Kysely<Database>,
	venues: readonly string[] = [],
	limit = 10_000
): Promise<StoredRobot[]> {
	let query = db
		.selectFrom('robot')
		.innerJoin('venue', 'venue.id', 'robot.venue_id')
		.innerJoin('robot_model as model', 'model.id', 'robot.model_id')
		.select(['robot.id', 'robot.venue_id', 'robot.key', 'robot.mark', 'venue.key as venue'])
		.select(['model.key as model_key', 'model.name', 'model.letter', 'model.length_m', 'model.width_m'])
		.select(['model.radius_m', 'model.max_speed_m_s'])
		.where('robot.retired_at_ms', 'is', null);
	if (venues.length > 0) query = query.where('venue.key', 'in', venues);
	const rows = await query.orderBy('venue.key').orderBy('robot.key').limit(limit).execute();
	return rows.map((row) => ({
		id: row.id,
		venueId: row.venue_id,
		venue: row.venue,
		robot: {
			key: row.key,
			mark: row.mark,
			model: {
				key: row.model_key,
				name: row.name,
				letter: row.letter,
				length: row.length_m,
				width: row.width_m,
				radius: row.radius_m,
				maxSpeed: row.max_speed_m_s
			}
		}
	}));
}
