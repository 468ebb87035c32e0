import { problem } from '$lib/server/http/problem';
import type { RequestHandler } from './$types';

/** Kit would answer an unknown address with a page. */
export const fallback: RequestHandler = async ({ locals, url }) =>
	problem({ title: 'Not found', status: 404, detail: `There is nothing at ${url.pathname}.` }, locals.requestId);
