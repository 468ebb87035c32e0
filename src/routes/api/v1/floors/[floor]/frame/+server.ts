import type { FrameAnswer } from '$lib/contracts/api';
import { Failure } from '$lib/domain/failure';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { floorExists } from '$lib/server/repositories/floors';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = api(async ({ locals, params }) => {
	requireRole(locals, 'display', 'read');
	const { db, hub } = locals.app;
	const frame = hub.latestFrame(params.floor);
	if (frame === null) {
		if (!(await floorExists(db, params.floor))) throw new Failure('not_found', 'There is no such floor.');
		throw new Failure('unavailable', 'Nothing has been measured on this floor since the start.');
	}
	const age_ms = Math.max(0, Date.now() - frame.server_time_ms);
	return Response.json({ ...frame, age_ms } satisfies FrameAnswer);
});
