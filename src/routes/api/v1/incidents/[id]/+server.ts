import { Failure } from '$lib/domain/failure';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { readIncident } from '$lib/server/repositories/incidents';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = api(async ({ locals, params }) => {
	requireRole(locals, 'display', 'read');
	const incident = await readIncident(locals.app.db, params.id);
	if (incident === undefined) throw new Failure('not_found', 'There is no such incident.');
	return Response.json(incident);
});
