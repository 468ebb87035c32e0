import { afterEach, beforeEach, expect, it } from 'vitest';
import { readResiduals, storeResiduals } from '../../src/lib/server/repositories/residuals.ts';
import { readSites } from '../../src/lib/server/engine/site.ts';
import { createVenueState, forgetFlexibility, stepVenue } from '../../src/lib/domain/engine/venue-engine.ts';
import { insertSite } from '../support/database.ts';
import { startTestServer, type TestServer } from '../support/server.ts';

let server: TestServer;

beforeEach(async () => {
	server = await startTestServer();
	await insertSite(server.app.db);
});

afterEach(() => server.stop());

const forget = (headers: Record<string, string>) =>
	server.fetch('/api/v1/venues/quay/flexibility/forget', {
		method: 'POST',
		headers: { ...headers, 'content-type': 'application/json' },
		body: '{}'
	});

it('a maintainer can have it learned anew, which is kept in the audit trail; an operator cannot', async () => {
	expect((await forget(await server.as('operator'))).status).toBe(403);
	expect(server.threads.forgotten).toEqual([]);
	expect((await forget(await server.as('maintainer'))).status).toBe(202);
	expect(server.threads.forgotten).toEqual(['quay']);
	const audit = await server.app.db
		.selectFrom('audit_event')
		.selectAll()
		.where('act', '=', 'flexibility_forgotten')
		.execute();
	expect(audit).toEqual([expect.objectContaining({ subject: 'venue quay' })]);
});

it('what was learned outlives a restart, is shown with its n, and is gone once forgotten', async () => {
	const { db } = server.app;
	await storeResiduals(
		db,
		'quay-ground',
		Array.from({ length: 200 }, (_, i) => i / 400)
	);
	const [site] = await readSites(db, []);
	const state = createVenueState(site!.context, site!);
	const { frames } = stepVenue(site!.context, state, [], 1_790_000_000);
	expect(frames[0]!.flexibility).toMatchObject({ n: 200, learned: true });
	// Type 7 quantile (Hyndman & Fan 1996) of 0, 1/400 … 199/400 at 0.85: rank 199 · 0.85 = 169.15.
	expect(frames[0]!.flexibility.value).toBeCloseTo(169.15 / 400, 3);
	const after = stepVenue(site!.context, forgetFlexibility(site!.context, state), [], 1_790_000_000);
	expect(after.frames[0]!.flexibility).toMatchObject({ value: 0.3, n: 0, learned: false });
});

it('does without what cannot be read of it', async () => {
	const { db } = server.app;
	await db.insertInto('setting').values({ key: 'residuals:quay-ground', value: '["x"]' }).execute();
	expect([...(await readResiduals(db))]).toEqual([]);
});
