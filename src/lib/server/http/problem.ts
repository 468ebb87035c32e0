/** Error answers of the API: problem details (RFC 9457). */

import type { RequestEvent } from '@sveltejs/kit';
import { Failure, type FailureCode } from '$lib/domain/failure';
import type { Problem } from '$lib/contracts/api';

export const STATUS: Readonly<Record<FailureCode, number>> = {
	bad_input: 400,
	unauthenticated: 401,
	forbidden: 403,
	not_found: 404,
	conflict: 409,
	too_many_requests: 429,
	unavailable: 503,
	storage: 503
};

const TITLE: Readonly<Record<FailureCode, string>> = {
	bad_input: 'The request is not valid',
	unauthenticated: 'Sign-in needed',
	forbidden: 'Not allowed',
	not_found: 'Not found',
	conflict: 'In conflict with the present state',
	too_many_requests: 'Too many requests',
	unavailable: 'Not available now',
	storage: 'The database does not work'
};

/** Runs an API handler; every expected failure leaves as problem details. Anything else is a bug and goes on to `handleError`. */
export function api<E extends RequestEvent>(handler: (event: E) => Promise<Response>) {
	return async (event: E): Promise<Response> => {
		try {
			return await handler(event);
		} catch (cause) {
			if (!(cause instanceof Failure)) throw cause;
			if (cause.code === 'storage')
				event.locals.app.log.error({ err: cause, request: event.locals.requestId }, cause.message);
			return problemFrom(cause, event.locals.requestId);
		}
	};
}

export function problemFrom({ code, message, details }: Failure, requestId: string): Response {
	const status = STATUS[code];
	const body = { type: `/problems/${code}`, title: TITLE[code], status, detail: message, details };
	return problem(body, requestId, retryHeaders(code, details));
}

/** A problem answer; `type` may be left out when the status says it all. */
export function problem(
	{ type = 'about:blank', ...body }: Omit<Problem, 'type' | 'request_id'> & { type?: string },
	requestId: string,
	headers: Readonly<Record<string, string>> = {}
): Response {
	return Response.json(
		{ type, ...body, request_id: requestId },
		{ status: body.status, headers: { 'content-type': 'application/problem+json', ...headers } }
	);
}

function retryHeaders(code: FailureCode, details: unknown): Record<string, string> {
	if (code === 'unauthenticated') return { 'www-authenticate': 'Bearer realm="elbowroom"' };
	if (code === 'unavailable' || code === 'storage') return { 'retry-after': '2' };
	const seconds = (details as { retry_after_s?: unknown } | undefined)?.retry_after_s;
	return typeof seconds === 'number' ? { 'retry-after': String(seconds) } : {};
}
