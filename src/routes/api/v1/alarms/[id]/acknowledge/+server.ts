import { Failure } from '$lib/domain/failure';
import { acknowledgeAlarm } from '$lib/server/alarms/acknowledge';
import { readBody } from '$lib/server/http/input';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { z } from 'zod';
import type { RequestHandler } from './$types';

const Body = z.strictObject({});

export const POST: RequestHandler = api(async ({ locals, params, request }) => {
	const user = requireRole(locals, 'operator');
	await readBody(request, Body);
	if (!/^[1-9]\d{0,14}$/.test(params.id)) throw new Failure('not_found', 'There is no such alarm.');
	const { alarm } = await acknowledgeAlarm(locals.app, { alarmId: Number(params.id), by: user.id, nowMs: Date.now() });
	return Response.json(alarm);
});
