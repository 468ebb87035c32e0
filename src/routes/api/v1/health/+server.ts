import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = api(async ({ locals }) => {
	requireRole(locals, 'display', 'read');
	return Response.json(locals.app.threads.health());
});
