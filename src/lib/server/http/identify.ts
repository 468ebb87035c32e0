/** Who a request comes from: a browser with its session cookie, or a program with a token. */

import type { Cookies, RequestEvent } from '@sveltejs/kit';
import type { App } from '../app.ts';
import { isApiTokenLive, validateApiToken } from '../auth/api-tokens.ts';
import { deleteSessionCookie, readSessionCookie, setSessionCookie } from '../auth/cookie.ts';
import type { SessionUser } from '../auth/sessions.ts';

export type Credential =
	{ readonly kind: 'session'; readonly id: string } | { readonly kind: 'token'; readonly id: number };

export interface Identity {
	readonly user: SessionUser;
	readonly credential: Credential;
}

/** Programs send their token to the API only. A request that has both counts as the token's, whose rights are narrower. */
export async function identify(app: App, { request, url, cookies }: RequestEvent): Promise<Identity | null> {
	const bearer = /^Bearer +(\S+)$/i.exec(request.headers.get('authorization') ?? '')?.[1];
	if (bearer !== undefined && url.pathname.startsWith('/api/')) {
		const found = await validateApiToken(app.db, bearer, Date.now());
		return found === null ? null : { user: found.user, credential: { kind: 'token', id: found.tokenId } };
	}
	return fromCookie(app, cookies, url);
}

async function fromCookie(app: App, cookies: Cookies, url: URL): Promise<Identity | null> {
	const token = readSessionCookie(cookies, url);
	if (token === undefined) return null;
	const found = await app.auth.validate(token);
	if (found === null) {
		deleteSessionCookie(cookies, url);
		return null;
	}
	if (found.renewedUntil !== null) setSessionCookie(cookies, url, token, found.renewedUntil);
	return { user: found.user, credential: { kind: 'session', id: found.sessionId } };
}

/** Whether what a request was let in with is still good. */
export const isStillGood = (app: App, credential: Credential): Promise<boolean> =>
	credential.kind === 'session' ? app.auth.isLive(credential.id) : isApiTokenLive(app.db, credential.id);
