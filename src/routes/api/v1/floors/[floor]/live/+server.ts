import { Failure } from '$lib/domain/failure';
import { isStillGood } from '$lib/server/http/identify';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { liveResponse } from '$lib/server/http/sse';
import { floorExists } from '$lib/server/repositories/floors';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = api(async ({ locals, params, request }) => {
	requireRole(locals, 'display', 'read');
	const { app, credential } = locals;
	if (!(await floorExists(app.db, params.floor))) throw new Failure('not_found', 'There is no such floor.');
	return liveResponse({
		hub: app.hub,
		floor: params.floor,
		lastEventId: request.headers.get('last-event-id'),
		signal: request.signal,
		mayListen: async () => credential !== null && (await isStillGood(app, credential)),
		onSlowReader: app.metrics.countSlowReader
	});
});
