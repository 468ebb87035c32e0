/** The API on a real port with a database of its own and threads that only pretend. Routes and guards are the program's. */

import type { Cookies, RequestEvent } from '@sveltejs/kit';
import { getRequest, setResponse } from '@sveltejs/kit/node';
import { once } from 'node:events';
import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { LiveHealth } from '../../src/lib/contracts/live.ts';
import { startApp, type App } from '../../src/lib/server/app.ts';
import { createApiToken } from '../../src/lib/server/auth/api-tokens.ts';
import type { Role } from '../../src/lib/server/db/schema.ts';
import { readSettings } from '../../src/lib/server/settings.ts';
import type { StartThreads, Threads } from '../../src/lib/server/threads/supervisor.ts';
import { handle } from '../../src/hooks.server.ts';
import { fileDatabase, insertTestUser, T0 } from './database.ts';

type Module = Record<string, ((event: RequestEvent) => Promise<Response>) | undefined>;
const modules = import.meta.glob<Module>([
	'/src/routes/api/**/+server.ts',
	'/src/routes/healthz/+server.ts',
	'/src/routes/metrics/+server.ts'
]);

const routes = Object.entries(modules)
	.map(([file, load]) => {
		const id = file.slice('/src/routes'.length, -'/+server.ts'.length);
		const pattern = id.replace(/\[\.\.\.(\w+)\]/g, '(?<$1>.*)').replace(/\[(\w+)\]/g, '(?<$1>[^/]+)');
		return { id, load, pattern: new RegExp(`^${pattern}$`) };
	})
	.sort((a, b) => Number(a.id.includes('...')) - Number(b.id.includes('...')));

export const HEALTHY: LiveHealth = {
	server_time_ms: T0,
	broker: true,
	engine: true,
	storage: true,
	troubles: [],
	messages_per_s: 12,
	rejected_total: 3,
	last_message_age_ms: 40
};

export interface TestServer {
	readonly app: App;
	readonly origin: string;
	/** What the threads were given, to speak in their name; `health` is what they answer. */
	readonly threads: StartThreads & { health: LiveHealth; stopped: number; forgotten: string[] };
	fetch(path: string, init?: RequestInit): Promise<Response>;
	/** Headers of a program with a token of a new person in this role */
	as(role: Role): Promise<Record<string, string>>;
	stop(): Promise<void>;
}

export async function startTestServer(env: Record<string, string> = {}): Promise<TestServer> {
	const database = await fileDatabase();
	const settings = readSettings({ LOG_LEVEL: 'silent', ...env, DATABASE_PATH: database.path });
	let threads: TestServer['threads'] | undefined;
	const app = await startApp(settings, async (parts): Promise<Threads> => {
		const given = (threads = { ...parts, health: HEALTHY, stopped: 0, forgotten: [] as string[] });
		return {
			reload: () => {},
			forgetFlexibility: (venue) => void given.forgotten.push(venue),
			health: () => given.health,
			stop: async () => void given.stopped++,
			brokerPort: null
		};
	});
	// As hooks.server.ts keeps it.
	(globalThis as { elbowroomApp?: App }).elbowroomApp = app;

	const server = createServer((request, response) => {
		void (async () => {
			const base = `http://${request.headers.host}`;
			const event = eventFor(await getRequest({ request, base }), request.socket.remoteAddress ?? '');
			await setResponse(response, await answer(event));
		})();
	}).listen(0, '127.0.0.1');
	await once(server, 'listening');
	const origin = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;

	let people = 0;
	return {
		app,
		origin,
		threads: threads!,
		fetch: (path, init) => fetch(origin + path, init),
		async as(role) {
			const user = await insertTestUser(app.db, role, `${role}-${++people}`);
			const { token } = await createApiToken(app.db, { user, name: 'test', role, nowMs: T0 });
			return { authorization: `Bearer ${token}` };
		},
		async stop() {
			await app.stop();
			server.closeAllConnections();
			server.close();
			await database.remove();
		}
	};
}

async function answer(event: RequestEvent): Promise<Response> {
	try {
		return await handle({ event, resolve: () => route(event) });
	} catch (cause) {
		const { status, location } = cause as { status?: number; location?: string };
		if (status === undefined || location === undefined) return new Response(String(cause), { status: 500 });
		return new Response(null, { status, headers: { location } });
	}
}

async function route(event: RequestEvent): Promise<Response> {
	const found = routes.find(({ id }) => id === event.route.id);
	const module = await found?.load();
	const handler = module?.[event.request.method] ?? module?.['fallback'];
	return handler ? handler(event) : new Response('', { status: found ? 405 : 404 });
}

/** As much of an event as endpoints, guards and actions of ours look at. */
export function eventFor(request: Request, address = '127.0.0.1'): RequestEvent {
	const url = new URL(request.url);
	const found = routes.map(({ id, pattern }) => ({ id, match: pattern.exec(url.pathname) })).find(({ match }) => match);
	const event = {
		request,
		url,
		route: { id: found?.id ?? null },
		params: { ...found?.match?.groups },
		locals: {},
		cookies: cookieJar(request.headers.get('cookie') ?? ''),
		getClientAddress: () => address,
		setHeaders: () => {},
		isDataRequest: false
	};
	return event as unknown as RequestEvent;
}

interface SetCookie {
	readonly value: string;
	readonly options: Parameters<Cookies['set']>[2];
}

/** Cookies of a request, and below `set` those the answer sets ('' for a deleted one). */
export function cookieJar(
	header: string
): Pick<Cookies, 'get' | 'set' | 'delete'> & { changes: Map<string, SetCookie> } {
	const sent = new Map(header.split('; ').map((pair) => pair.split('=') as [string, string]));
	const changes = new Map<string, SetCookie>();
	return {
		changes,
		get: (name) => changes.get(name)?.value ?? sent.get(name),
		set: (name, value, options) => void changes.set(name, { value, options }),
		delete: (name, options) => void changes.set(name, { value: '', options })
	};
}
