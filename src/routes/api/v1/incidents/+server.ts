import { HALT_KINDS, VERDICTS, type IncidentPage } from '$lib/contracts/api';
import { nextLink, page, textCursor } from '$lib/server/http/cursor';
import { queryInt, queryLimit, queryNumber, readQuery } from '$lib/server/http/input';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { readIncidents } from '$lib/server/repositories/incidents';
import { z } from 'zod';
import type { RequestHandler } from './$types';

const Query = z
	.strictObject({
		state: z.enum(['open', 'closed']).optional(),
		floor: z.string().optional(),
		kind: z.enum(HALT_KINDS).optional(),
		verdict: z.enum(VERDICTS).optional(),
		robot: z.string().optional(),
		from_ms: queryInt.optional(),
		to_ms: queryInt.optional(),
		near_x_m: queryNumber.optional(),
		near_y_m: queryNumber.optional(),
		radius_m: queryNumber.pipe(z.number().positive().max(1000)).optional(),
		limit: queryLimit,
		cursor: textCursor.optional()
	})
	.refine(({ near_x_m, near_y_m, radius_m, floor }) => {
		const given = [near_x_m, near_y_m, radius_m].filter((value) => value !== undefined).length;
		return given === 0 || (given === 3 && floor !== undefined);
	}, 'near_x_m, near_y_m and radius_m belong together, with a floor');

export const GET: RequestHandler = api(async ({ locals, url }) => {
	requireRole(locals, 'display', 'read');
	const { limit, cursor, from_ms, to_ms, near_x_m, near_y_m, radius_m, ...same } = readQuery(url, Query);
	const near =
		near_x_m !== undefined && near_y_m !== undefined && radius_m !== undefined
			? { x: near_x_m, y: near_y_m, radius: radius_m }
			: undefined;
	const filter = { ...same, fromMs: from_ms, toMs: to_ms, near, after: cursor };
	const found = await readIncidents(locals.app.db, filter, limit + 1);
	const { rows, next } = page(found, limit, ({ onset_ms, id }) => ({ atMs: onset_ms, id }));
	const answer: IncidentPage = { incidents: [...rows], next_cursor: next };
	return Response.json(answer, { headers: nextLink(url, next) });
});
