import { forgetFlexibility } from '$lib/server/engine/forget';
import { readBody } from '$lib/server/http/input';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { z } from 'zod';
import type { RequestHandler } from './$types';

const Body = z.strictObject({});

export const POST: RequestHandler = api(async ({ locals, params, request }) => {
	const user = requireRole(locals, 'maintainer');
	await readBody(request, Body);
	await forgetFlexibility(locals.app, { venue: params.venue, by: user.id, nowMs: Date.now() });
	return new Response(null, { status: 202 });
});
