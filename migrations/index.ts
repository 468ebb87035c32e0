/** All migrations in order. Append only: a name that has been released never changes or moves. */

import type { Migration } from 'kysely';
import { start } from './0001_start.ts';

export const migrations: Readonly<Record<string, Migration>> = {
	'0001_start': start
};
