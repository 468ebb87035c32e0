import { sameSecret } from '$lib/server/auth/secrets';
import { isFromHere } from '$lib/server/http/address';
import { problem } from '$lib/server/http/problem';
import type { RequestEvent } from '@sveltejs/kit';
import type { RequestHandler } from './$types';

/** Prometheus text. Open to whoever has METRICS_TOKEN, or to this machine while none is set. */
export const GET: RequestHandler = async (event) => {
	const { app, requestId } = event.locals;
	if (!mayRead(event, app.settings.metricsToken)) {
		const detail = 'Send METRICS_TOKEN as a bearer token, or ask from this machine.';
		return problem({ title: 'Not allowed', status: 403, detail }, requestId);
	}
	const { registry } = app.metrics;
	return new Response(await registry.metrics(), {
		headers: { 'content-type': registry.contentType, 'cache-control': 'no-store' }
	});
};

function mayRead(event: RequestEvent, token: string | null): boolean {
	if (token === null) return isFromHere(event);
	const given = /^Bearer +(\S+)$/i.exec(event.request.headers.get('authorization') ?? '')?.[1];
	return given !== undefined && sameSecret(given, token);
}
