/** Which robots may sign in. */

import type { Kysely } from 'kysely';
import type { Database } from '../db/schema.ts';
import type { RobotCredential } from './credentials.ts';

/** Credentials in force of robots in service, oldest first; at most `limit` of them. */
export async function readRobotCredentials(db: Kysely<Database>, limit = 10_000): Promise<RobotCredential[]> {
	return db
		.selectFrom('robot_credential')
		.innerJoin('robot', 'robot.id', 'robot_credential.robot_id')
		.innerJoin('venue', 'venue.id', 'robot.venue_id')
		.select([
			'robot_credential.id',
			'venue.key as venue',
			'robot.key as robot',
			'robot_credential.password_hash as passwordHash',
			'robot_credential.mosquitto_hash as mosquittoHash'
		])
		.where('robot_credential.revoked_at_ms', 'is', null)
		.where('robot.retired_at_ms', 'is', null)
		.orderBy('robot_credential.id')
		.limit(limit)
		.execute();
}
