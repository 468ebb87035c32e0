import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { areaOf, judgeVisit, safeNext, type Visit } from './guard.ts';

const visit = (change: Partial<Visit>): Visit => ({
	method: 'GET',
	routeId: '/api/v1/floors',
	pathname: '/api/v1/floors',
	ownOrigin: 'https://desk.example.org',
	origin: null,
	fetchSite: null,
	contentType: null,
	hasBody: false,
	credential: 'session',
	...change
});
const post = (change: Partial<Visit>) => judgeVisit(visit({ method: 'POST', ...change }));

describe('the door', () => {
	it('asks for a sign-in at pages and the API, and not elsewhere', () => {
		const visitor = { credential: null };
		expect(judgeVisit(visit(visitor))).toBe('sign in');
		expect(judgeVisit(visit({ ...visitor, routeId: '/(app)/floors/[floor]', pathname: '/floors/a' }))).toBe('sign in');
		expect(judgeVisit(visit({ ...visitor, routeId: '/(auth)/sign-in', pathname: '/sign-in' }))).toBe('come in');
		expect(judgeVisit(visit({ ...visitor, routeId: '/healthz', pathname: '/healthz' }))).toBe('come in');
	});

	it('guards an API path that does not exist like one that does', () => {
		expect(areaOf({ routeId: null, pathname: '/api/v2/secret' })).toBe('api');
		expect(areaOf({ routeId: null, pathname: '/apiary' })).toBe('open');
	});

	it.each([
		['https://desk.example.org', 'come in'],
		['https://evil.example.org', 'foreign origin'],
		['http://desk.example.org', 'foreign origin'],
		['https://desk.example.org:8443', 'foreign origin'],
		['https://desk.example.org.evil.example.org', 'foreign origin'],
		['null', 'foreign origin']
	] as const)('answers an unsafe method from %s with: %s', (origin, verdict) => {
		expect(post({ origin })).toBe(verdict);
		expect(post({ origin, method: 'DELETE' })).toBe(verdict);
	});

	it('guards the sign-in form itself', () => {
		const form = { routeId: '/(auth)/sign-in', pathname: '/sign-in', credential: null };
		expect(post({ ...form, origin: 'https://evil.example.org' })).toBe('foreign origin');
	});

	it('lets foreign pages read nothing they could not read anyway: safe methods pass', () => {
		expect(judgeVisit(visit({ origin: 'https://evil.example.org' }))).toBe('come in');
	});

	it('goes by Sec-Fetch-Site when a browser names no origin', () => {
		expect(post({ fetchSite: 'cross-site' })).toBe('foreign origin');
		expect(post({ fetchSite: 'same-site' })).toBe('foreign origin');
		expect(post({ fetchSite: 'same-origin' })).toBe('come in');
	});

	it('exempts a program that sends a token from the origin check', () => {
		expect(post({ credential: 'token', origin: 'https://evil.example.org' })).toBe('come in');
	});

	it('takes bodies in JSON only at the API', () => {
		expect(post({ hasBody: true, contentType: 'text/plain' })).toBe('not json');
		expect(post({ hasBody: true, contentType: 'application/jsonp' })).toBe('not json');
		expect(post({ hasBody: true, contentType: null })).toBe('not json');
		expect(post({ hasBody: true, contentType: 'application/json; charset=utf-8' })).toBe('come in');
		expect(post({ hasBody: false })).toBe('come in');
	});
});

describe('the way on after signing in', () => {
	it('is kept when it is a path of ours', () => {
		expect(safeNext('/floors/a?select=robot:b#c')).toBe('/floors/a?select=robot:b#c');
	});

	it.each([
		null,
		'',
		'floors',
		'//evil.example.org',
		'/\\evil.example.org',
		'/\t/evil.example.org',
		'https://evil.example.org',
		'javascript:alert(1)'
	])('is the start page instead of %j', (next) => {
		expect(safeNext(next)).toBe('/');
	});

	it('never leaves the server', () => {
		const host = 'https://desk.example.org';
		fc.assert(
			fc.property(
				fc.oneof(
					fc.string(),
					fc.webUrl(),
					fc.string().map((rest) => `/${rest}`)
				),
				(next) => {
					expect(new URL(safeNext(next), host).origin).toBe(host);
				}
			)
		);
	});
});
