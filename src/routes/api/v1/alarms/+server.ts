import { ALARM_STATES } from '$lib/contracts/api';
import { readLiveAlarms } from '$lib/server/alarms/read';
import { nextLink, numberCursor, page } from '$lib/server/http/cursor';
import { queryLimit, readQuery } from '$lib/server/http/input';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { z } from 'zod';
import type { RequestHandler } from './$types';

const Query = z.strictObject({
	/** `active` is every state but cleared */
	state: z.enum(['active', ...ALARM_STATES]).optional(),
	floor: z.string().optional(),
	limit: queryLimit,
	cursor: numberCursor.optional()
});

export const GET: RequestHandler = api(async ({ locals, url }) => {
	requireRole(locals, 'display', 'read');
	const { state, floor, limit, cursor } = readQuery(url, Query);
	const found = await readLiveAlarms(locals.app.db, { state, floor, after: cursor, limit: limit + 1 });
	const { rows, next } = page(found, limit, ({ raised_at_ms, id }) => ({ atMs: raised_at_ms, id }));
	const answer = { alarms: rows, next_cursor: next };
	return Response.json(answer, { headers: nextLink(url, next) });
});
