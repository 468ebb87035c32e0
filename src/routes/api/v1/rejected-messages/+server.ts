import type { RejectedMessages } from '$lib/contracts/api';
import { nextLink, numberCursor, page } from '$lib/server/http/cursor';
import { queryLimit, readQuery } from '$lib/server/http/input';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { readRejectedCounts, readRejectedMessages } from '$lib/server/repositories/rejected-messages';
import { z } from 'zod';
import type { RequestHandler } from './$types';

const DAY_MS = 86_400_000;
/** Days of counts shown, today included. */
const DAYS = 14;

const Query = z.strictObject({ limit: queryLimit, cursor: numberCursor.optional() });

export const GET: RequestHandler = api(async ({ locals, url }) => {
	requireRole(locals, 'maintainer', 'read');
	const { db } = locals.app;
	const { limit, cursor } = readQuery(url, Query);
	const today = Math.floor(Date.now() / DAY_MS) * DAY_MS;
	const counts = await readRejectedCounts(db, today - (DAYS - 1) * DAY_MS);
	const found = await readRejectedMessages(db, { after: cursor, limit: limit + 1 });
	const { rows, next } = page(found, limit, ({ at_ms, id }) => ({ atMs: at_ms, id }));
	const answer: RejectedMessages = {
		messages: rows.map(({ payload, ...row }) => ({ ...row, payload_base64: Buffer.from(payload).toString('base64') })),
		counts: counts.map((row) => ({ ...row, robot: row.robot === '' ? null : row.robot })),
		next_cursor: next
	};
	return Response.json(answer, { headers: nextLink(url, next) });
});
