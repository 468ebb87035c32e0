import { building, dev } from '$app/environment';
import { env } from '$env/dynamic/private';
import { Failure } from '$lib/domain/failure';
import { startApp, type App } from '$lib/server/app';
import { areaOf, judgeVisit, type Visit } from '$lib/server/http/guard';
import { secureHeaders } from '$lib/server/http/headers';
import { identify } from '$lib/server/http/identify';
import { problem, problemFrom, STATUS } from '$lib/server/http/problem';
import { readSettings } from '$lib/server/settings';
import { redirect, type Handle, type HandleServerError, type RequestEvent, type ServerInit } from '@sveltejs/kit';
import { randomUUID } from 'node:crypto';

/** Outlives the module: in development it is loaded again after every edit, and the app before it has to be stopped. */
const slot = globalThis as { elbowroomApp?: App | undefined };

export const init: ServerInit = async () => {
	if (building) return;
	await slot.elbowroomApp?.stop();
	slot.elbowroomApp = undefined;
	try {
		slot.elbowroomApp = await startApp(readSettings(env));
	} catch (cause) {
		if (dev) throw cause;
		giveUp(cause);
	}
	if (!dev) stopWithProcess();
};

/**
 * Event streams never end by themselves and the server waits for open answers, so they are closed on the signal; the
 * rest stops when the last answer is out.
 */
function stopWithProcess(): void {
	for (const signal of ['SIGTERM', 'SIGINT'] as const) process.once(signal, () => slot.elbowroomApp?.hub.close());
	process.once('sveltekit:shutdown', () => void slot.elbowroomApp?.stop());
	process.once('uncaughtException', (cause) => void slot.elbowroomApp?.stop().finally(() => giveUp(cause)));
}

/** Ends the process with one message: a sentence for what an operator can put right, everything for a bug. */
function giveUp(cause: unknown): never {
	process.stderr.write(`Elbowroom cannot run. ${inWords(cause)}\n`);
	process.exit(1);
}

function inWords(cause: unknown): string {
	if (cause instanceof Failure) return cause.message;
	const { code, syscall, port, stack } = cause as NodeJS.ErrnoException & { port?: number };
	if (syscall === 'listen' && code === 'EADDRINUSE') return `Port ${port} is taken; choose another with PORT.`;
	if (syscall === 'listen' && code === 'EACCES')
		return `Port ${port} may not be used; choose one above 1023 with PORT.`;
	return stack ?? String(cause);
}

export const handle: Handle = async ({ event, resolve }) => {
	const startedAt = performance.now();
	const app = slot.elbowroomApp;
	if (app === undefined) throw new Error('The app has not been started.');
	event.locals.app = app;
	event.locals.requestId = randomUUID();

	const response = await answer(app, event, resolve);
	secureHeaders(response.headers, { https: event.url.protocol === 'https:', signedIn: event.locals.user !== null });
	response.headers.set('x-request-id', event.locals.requestId);
	const duration_s = (performance.now() - startedAt) / 1000;
	app.metrics.countRequest(event.route.id ?? 'none', event.request.method, response.status, duration_s);
	return response;
};

async function answer(app: App, event: RequestEvent, resolve: Parameters<Handle>[0]['resolve']): Promise<Response> {
	const { locals, url } = event;
	const isApi = areaOf({ routeId: event.route.id, pathname: url.pathname }) === 'api';
	locals.user = null;
	locals.credential = null;
	try {
		const identity = await identify(app, event);
		locals.user = identity?.user ?? null;
		locals.credential = identity?.credential ?? null;
	} catch (cause) {
		// Kit makes an error page of what is thrown.
		if (!isApi || !(cause instanceof Failure)) throw cause;
		return problemFrom(cause, locals.requestId);
	}

	switch (judgeVisit(visitFrom(event))) {
		case 'foreign origin':
			return problem(
				{ title: 'Not allowed', status: 403, detail: 'The request comes from another site.' },
				locals.requestId
			);
		case 'not json':
			return problem(
				{ title: 'JSON only', status: 415, detail: 'Send the body as application/json.' },
				locals.requestId
			);
		case 'sign in':
			if (isApi)
				return problemFrom(new Failure('unauthenticated', 'Sign in, or send a valid token.'), locals.requestId);
			return toSignIn(event);
		case 'come in':
			return resolve(event);
	}
}

/** Kit turns a redirect that is thrown into the form its own scripts expect; a plain visit gets a plain answer. */
function toSignIn({ url, request, isDataRequest }: RequestEvent): Response {
	const location = `/sign-in?next=${encodeURIComponent(url.pathname + url.search)}`;
	if (isDataRequest || request.method !== 'GET') redirect(303, location);
	return new Response(null, { status: 303, headers: { location } });
}

function visitFrom({ request, route, url, locals }: RequestEvent): Visit {
	return {
		method: request.method,
		routeId: route.id,
		pathname: url.pathname,
		ownOrigin: url.origin,
		origin: request.headers.get('origin'),
		fetchSite: request.headers.get('sec-fetch-site'),
		contentType: request.headers.get('content-type'),
		hasBody: request.body !== null,
		credential: locals.credential?.kind ?? null
	};
}

export const handleError: HandleServerError = ({ error, event, status, message }) => {
	const errorId = event.locals.requestId;
	// A wrong address is nothing to log.
	if (status < 500) return { message, errorId };
	const app: App | undefined = event.locals.app;
	app?.log.error({ err: error, request: errorId, route: event.route.id }, 'request failed');
	if (error instanceof Failure && STATUS[error.code] >= 500)
		return { message: error.message, code: error.code, errorId };
	return { message: 'Something went wrong here. The number helps to find out what.', code: 'bug', errorId };
};
