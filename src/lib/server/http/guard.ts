/** Decides at the door what may come in. Pure: a request in a few words goes in, a verdict comes out. */

/** What kind of place a request wants to go to. */
export type Area = 'page' | 'api' | 'open';

export interface Visit {
	readonly method: string;
	/** Pattern of the route, for example `/(app)/floors/[floor]`; null when no route matches */
	readonly routeId: string | null;
	readonly pathname: string;
	/** Scheme, host and port the server is reached at */
	readonly ownOrigin: string;
	readonly origin: string | null;
	readonly fetchSite: string | null;
	readonly contentType: string | null;
	readonly hasBody: boolean;
	/** How the request says who it comes from */
	readonly credential: 'session' | 'token' | null;
}

export type Verdict = 'come in' | 'sign in' | 'foreign origin' | 'not json';

const SAFE_METHODS = new Set(['GET', 'HEAD', 'OPTIONS', 'TRACE']);

export const areaOf = ({ routeId, pathname }: Pick<Visit, 'routeId' | 'pathname'>): Area =>
	pathname === '/api' || pathname.startsWith('/api/') ? 'api' : routeId?.startsWith('/(app)') ? 'page' : 'open';

export function judgeVisit(visit: Visit): Verdict {
	const area = areaOf(visit);
	const unsafe = !SAFE_METHODS.has(visit.method);
	if (unsafe && isForeign(visit)) return 'foreign origin';
	if (area !== 'open' && visit.credential === null) return 'sign in';
	if (unsafe && area === 'api' && visit.hasBody && !isJson(visit.contentType)) return 'not json';
	return 'come in';
}

/**
 * Browsers name the origin of every unsafe request and cannot be made to lie about it. A request with a token and no
 * cookie carries nothing a foreign page could misuse; one with neither header does not come from a browser.
 */
function isForeign({ origin, ownOrigin, fetchSite, credential }: Visit): boolean {
	if (credential === 'token') return false;
	if (origin !== null) return origin !== ownOrigin;
	return fetchSite !== null && fetchSite !== 'same-origin' && fetchSite !== 'none';
}

const isJson = (contentType: string | null): boolean =>
	contentType?.split(';')[0]?.trim().toLowerCase() === 'application/json';

/** A path of ours to go to after signing in; anything that could lead elsewhere becomes `/`. */
export function safeNext(next: string | null): string {
	if (next === null || !next.startsWith('/')) return '/';
	const here = 'http://here.invalid';
	try {
		const url = new URL(next, here);
		// Browsers read `/\host` and `//host` as another host, and drop tabs and line ends first.
		return url.origin === here ? url.pathname + url.search + url.hash : '/';
	} catch {
		return '/';
	}
}
