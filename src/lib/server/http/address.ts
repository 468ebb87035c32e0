/** Network address of the other side. */

import type { RequestEvent } from '@sveltejs/kit';

/** `unknown` when the proxy in front did not say, which must not break a health check. */
export function clientAddress(event: Pick<RequestEvent, 'getClientAddress'>): string {
	try {
		return event.getClientAddress();
	} catch {
		return 'unknown';
	}
}

/** Whether the request was made on this very machine, and not merely handed on by a proxy that runs on it. */
export function isFromHere(event: Pick<RequestEvent, 'getClientAddress' | 'request'>): boolean {
	const handedOn = ['x-forwarded-for', 'forwarded', 'x-real-ip', 'via'].some((name) => event.request.headers.has(name));
	return !handedOn && /^(127(\.\d{1,3}){3}|::1|::ffff:127(\.\d{1,3}){3})$/i.test(clientAddress(event));
}
