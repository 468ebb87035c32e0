/** The session cookie: everything about it is in this file. */

import type { Cookies } from '@sveltejs/kit';

/** The prefix makes browsers insist on Secure, on this very host and on the path `/`. They refuse it without https. */
const nameFor = (url: URL) => (isSecure(url) ? '__Host-elbowroom' : 'elbowroom');
const isSecure = (url: URL) => url.protocol === 'https:';

const attributes = (url: URL) => ({ path: '/', httpOnly: true, sameSite: 'lax', secure: isSecure(url) }) as const;

export const readSessionCookie = (cookies: Cookies, url: URL): string | undefined => cookies.get(nameFor(url));

export const setSessionCookie = (cookies: Cookies, url: URL, token: string, expires: Date): void =>
	cookies.set(nameFor(url), token, { ...attributes(url), expires });

export const deleteSessionCookie = (cookies: Cookies, url: URL): void => cookies.delete(nameFor(url), attributes(url));
