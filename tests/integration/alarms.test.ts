/** Alarms in the database: raised, joined, returned, acknowledged. */

import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { acknowledgeAlarm } from '../../src/lib/server/alarms/acknowledge.ts';
import { raiseAlarm, returnAlarm, type Raise } from '../../src/lib/server/alarms/condition.ts';
import { readLiveAlarm, readLiveAlarms } from '../../src/lib/server/alarms/read.ts';
import { openDatabase } from '../../src/lib/server/db/connection.ts';
import { writeTransaction } from '../../src/lib/server/db/transaction.ts';
import type { LiveAlarm } from '../../src/lib/contracts/live.ts';
import { fileDatabase, insertSite, insertTestIncident, insertTestUser, T0, type Site } from '../support/database.ts';

let open: Awaited<ReturnType<typeof fileDatabase>>;
let site: Site;
let ada: string;
let published: LiveAlarm[];
const hub = { publishAlarm: (alarm: LiveAlarm) => void published.push(alarm) };

beforeEach(async () => {
	open = await fileDatabase();
	site = await insertSite(open.db);
	ada = (await insertTestUser(open.db, 'operator', 'ada')).id;
	published = [];
});
afterEach(() => open.remove());

const raise = (change: Partial<Raise> = {}): Promise<LiveAlarm> =>
	raiseAlarm(open.db, {
		venueId: site.venueId,
		dedupeKey: 'cause:1',
		type: 'freeze',
		priority: 'medium',
		floorId: site.floorId,
		zoneId: site.zoneId,
		place: 'Hall, Ground',
		what: 'P1 is stuck in a packed crowd',
		action: 'Send someone to open a way.',
		x: 2,
		y: 3,
		onsetMs: T0,
		atMs: T0 + 8000,
		...change
	});
const acknowledge = (alarmId: number, atMs: number, by = ada) =>
	acknowledgeAlarm({ db: open.db, hub }, { alarmId, by, nowMs: atMs });
const history = (alarmId: number) =>
	open.db.selectFrom('alarm_event').select(['act', 'state', 'at_ms']).where('alarm_id', '=', alarmId).execute();

describe('an alarm', () => {
	it('is read as it was raised, with the robots of its incidents', async () => {
		await insertTestIncident(open.db, site, { id: 'i1' });
		const alarm = await raise({ incident: 'i1' });
		expect(alarm).toEqual({
			id: alarm.id,
			type: 'freeze',
			priority: 'medium',
			state: 'unacknowledged',
			floor: 'quay-ground',
			zone: 'hall',
			place: 'Hall, Ground',
			what: 'P1 is stuck in a packed crowd',
			action: 'Send someone to open a way.',
			x_m: 2,
			y_m: 3,
			raised_at_ms: T0 + 8000,
			onset_ms: T0,
			returned_at_ms: null,
			acknowledged_at_ms: null,
			acknowledged_by: null,
			robots: ['porter-1'],
			incidents: ['i1'],
			revision: 1
		});
		expect(await readLiveAlarms(open.db)).toEqual([alarm]);
	});

	it('takes further incidents of its cause without a second alarm, and says so with a new revision', async () => {
		await insertTestIncident(open.db, site, { id: 'i1' });
		await insertTestIncident(open.db, site, { id: 'i2', robot_id: site.robotIds[1]!, onset_ms: T0 + 5000 });
		const first = await raise({ incident: 'i1' });
		const joined = await raise({ incident: 'i2', what: 'P2 is stuck too', atMs: T0 + 13_000 });
		expect(joined).toMatchObject({ id: first.id, what: first.what, raised_at_ms: first.raised_at_ms });
		expect(joined).toMatchObject({ robots: ['porter-1', 'porter-2'], incidents: ['i1', 'i2'] });
		expect(joined.revision).toBeGreaterThan(first.revision);
		expect(await history(first.id)).toHaveLength(1);
	});

	it('takes over the words of something more urgent, and not those of something less', async () => {
		await insertTestIncident(open.db, site, { id: 'i1' });
		await insertTestIncident(open.db, site, { id: 'i2' });
		await raise({ incident: 'i1' });
		const worse = await raise({ incident: 'i2', priority: 'high', type: 'fault', what: 'P2 reports a fault' });
		expect(worse).toMatchObject({ priority: 'high', type: 'fault', what: 'P2 reports a fault' });
		expect(await raise({ priority: 'low', what: 'P1 drives on' })).toMatchObject({ what: 'P2 reports a fault' });
	});

	it('follows its only incident when that turns into something else', async () => {
		await insertTestIncident(open.db, site, { id: 'i1' });
		await raise({ incident: 'i1', priority: 'high', type: 'fault' });
		const changed = await raise({ incident: 'i1', priority: 'low', type: 'dither', what: 'P1 dithers' });
		expect(changed).toMatchObject({ priority: 'low', type: 'dither', what: 'P1 dithers', state: 'unacknowledged' });
	});

	it('that returns before anybody looked stays until it is acknowledged', async () => {
		const { id } = await raise();
		expect(await returnAlarm(open.db, id, T0 + 20_000)).toMatchObject({
			state: 'returned',
			returned_at_ms: T0 + 20_000,
			revision: 2
		});
		expect(await returnAlarm(open.db, id, T0 + 30_000)).toBeNull();
		const { alarm } = await acknowledge(id, T0 + 40_000);
		expect(alarm).toMatchObject({ state: 'cleared', acknowledged_by: 'ada', acknowledged_at_ms: T0 + 40_000 });
		expect(await readLiveAlarms(open.db)).toEqual([]);
		expect((await history(id)).map(({ act, state }) => `${act}: ${state}`)).toEqual([
			'raise: unacknowledged',
			'clear: returned',
			'acknowledge: cleared'
		]);
	});

	it('that comes back unacknowledged calls again, as the same alarm', async () => {
		const { id } = await raise();
		await returnAlarm(open.db, id, T0 + 20_000);
		expect(await raise({ atMs: T0 + 25_000 })).toMatchObject({ id, state: 'unacknowledged', returned_at_ms: null });
	});

	it('of a cause whose last alarm is cleared is a new one', async () => {
		const { id } = await raise();
		await acknowledge(id, T0 + 9000);
		await returnAlarm(open.db, id, T0 + 20_000);
		const next = await raise({ atMs: T0 + 60_000 });
		expect(next.id).not.toBe(id);
		expect(next).toMatchObject({ state: 'unacknowledged', acknowledged_by: null });
	});

	it('of a cause that another venue has too is another alarm', async () => {
		const { id } = await open.db
			.insertInto('venue')
			.values({ key: 'mill', name: 'Mill', town: 'Pellmouth', time_zone: 'Europe/London' })
			.returning('id')
			.executeTakeFirstOrThrow();
		const here = await raise();
		expect((await raise({ venueId: id, floorId: null, zoneId: null })).id).not.toBe(here.id);
	});

	it('is not there when the transaction it was raised in fails', async () => {
		const work = writeTransaction(open.db, async (trx) => {
			await raiseAlarm(trx, {
				venueId: site.venueId,
				dedupeKey: 'broker',
				type: 'ingest',
				priority: 'high',
				floorId: null,
				zoneId: null,
				place: 'Whole venue',
				what: 'No robot can be heard',
				action: 'Have the network checked.',
				x: null,
				y: null,
				onsetMs: T0,
				atMs: T0
			});
			throw new Error('later in the same transaction');
		});
		await expect(work).rejects.toThrow('later');
		expect(await readLiveAlarms(open.db, {})).toEqual([]);
	});
});

describe('acknowledging', () => {
	it('is told to the readers once, kept in the history, and in the audit trail', async () => {
		const { id } = await raise();
		const { alarm, changed } = await acknowledge(id, T0 + 9000);
		expect(changed).toBe(true);
		expect(alarm).toMatchObject({ state: 'acknowledged', acknowledged_by: 'ada', revision: 2 });
		expect(published).toEqual([alarm]);
		const trail = await open.db.selectFrom('audit_event').selectAll().execute();
		expect(trail).toMatchObject([{ actor_user_id: ada, act: 'alarm_acknowledged', subject: `alarm ${id}` }]);
	});

	it('a second time changes nothing: the first name and time stay', async () => {
		const ben = (await insertTestUser(open.db, 'operator', 'ben')).id;
		const { id } = await raise();
		const first = await acknowledge(id, T0 + 9000);
		expect(await acknowledge(id, T0 + 10_000, ben)).toEqual({ alarm: first.alarm, changed: false });
		expect(published).toHaveLength(1);
	});

	it('by two at once, each on a connection of their own, keeps exactly one', async () => {
		const ben = (await insertTestUser(open.db, 'operator', 'ben')).id;
		const other = openDatabase(open.path);
		const { id } = await raise();
		const results = await Promise.all([
			acknowledge(id, T0 + 9000),
			acknowledgeAlarm({ db: other.db, hub }, { alarmId: id, by: ben, nowMs: T0 + 9001 })
		]);
		expect(results.filter(({ changed }) => changed)).toHaveLength(1);
		expect(results[0].alarm).toEqual(results[1].alarm);
		expect(await history(id)).toHaveLength(2);
		expect(published).toHaveLength(1);
		await other.close();
	});

	it('what is not there fails in words', async () => {
		await expect(acknowledge(4711, T0)).rejects.toMatchObject({ code: 'not_found' });
	});
});

describe('lists of alarms', () => {
	it('filter by state and floor and go on after a cursor', async () => {
		const a = await raise({ dedupeKey: 'a', atMs: T0 + 1000 });
		const b = await raise({ dedupeKey: 'b', atMs: T0 + 2000 });
		const c = await raise({ dedupeKey: 'c', atMs: T0 + 2000, floorId: null, zoneId: null });
		await acknowledge(a.id, T0 + 3000);
		const ids = async (filter: Parameters<typeof readLiveAlarms>[1]) =>
			(await readLiveAlarms(open.db, filter)).map(({ id }) => id);
		expect(await ids({})).toEqual([c.id, b.id, a.id]);
		expect(await ids({ state: 'acknowledged' })).toEqual([a.id]);
		expect(await ids({ state: 'active', floor: 'quay-ground' })).toEqual([b.id, a.id]);
		expect(await ids({ limit: 1 })).toEqual([c.id]);
		expect(await ids({ after: { atMs: T0 + 2000, id: c.id } })).toEqual([b.id, a.id]);
		expect(await readLiveAlarm(open.db, 4711)).toBeUndefined();
	});
});
