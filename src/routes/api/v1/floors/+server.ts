import type { FloorList } from '$lib/contracts/api';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { listFloors } from '$lib/server/repositories/floors';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = api(async ({ locals }) => {
	requireRole(locals, 'display', 'read');
	const rows = await listFloors(locals.app.db);
	const floors = rows.map(({ key, name, sort, venue_key, venue_name, town, time_zone }) => ({
		key,
		name,
		sort,
		venue: { key: venue_key, name: venue_name, town, time_zone }
	}));
	return Response.json({ floors } satisfies FloorList);
});
