import { afterEach, beforeEach, expect, it } from 'vitest';
import { watchConfiguration } from '../../src/lib/server/configuration-watch.ts';
import { fileDatabase, insertSite } from '../support/database.ts';

let database: Awaited<ReturnType<typeof fileDatabase>>;

beforeEach(async () => {
	database = await fileDatabase();
});
afterEach(() => database.remove());

it('tells once of each change to floors, zones, robots or credentials, and of nothing else', async () => {
	const { db } = database;
	let changes = 0;
	const look = watchConfiguration(db, () => void changes++);
	await look();
	expect(changes).toBe(0);

	const { robotIds } = await insertSite(db);
	await look();
	await look();
	expect(changes).toBe(1);

	const credential = { robot_id: robotIds[0]!, password_hash: 'x', created_at_ms: 1 };
	await db.insertInto('robot_credential').values(credential).execute();
	await look();
	await db.updateTable('robot_credential').set({ revoked_at_ms: 2 }).execute();
	await look();
	await db.updateTable('zone').set({ threshold_per_m2: 0.9 }).execute();
	await look();
	expect(changes).toBe(4);

	await db.insertInto('setting').values({ key: 'k', value: '1' }).execute();
	await look();
	expect(changes).toBe(4);
});
