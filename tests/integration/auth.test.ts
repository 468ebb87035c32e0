/** Signing in, staying signed in, and what is left in the database of it. */

import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import {
	createApiToken,
	isApiTokenLive,
	listApiTokens,
	revokeApiToken,
	validateApiToken
} from '../../src/lib/server/auth/api-tokens.ts';
import { deleteSessionCookie, readSessionCookie, setSessionCookie } from '../../src/lib/server/auth/cookie.ts';
import { hashPassword, verifyPassword } from '../../src/lib/server/auth/passwords.ts';
import { createAuth, type Auth, type SessionUser } from '../../src/lib/server/auth/sessions.ts';
import { createUser } from '../../src/lib/server/auth/users.ts';
import { openDatabase } from '../../src/lib/server/db/connection.ts';
import type { Role } from '../../src/lib/server/db/schema.ts';
import { actions } from '../../src/routes/(auth)/sign-in/+page.server.ts';
import { fileDatabase, insertTestUser, T0 } from '../support/database.ts';
import { eventFor } from '../support/server.ts';

const PASSWORD = 'tide table on the north quay';
const DAY_MS = 86_400_000;

let open: Awaited<ReturnType<typeof fileDatabase>>;
let auth: Auth;

beforeEach(async () => {
	// Lucia reads the system clock.
	vi.useFakeTimers({ toFake: ['Date'], now: T0 });
	open = await fileDatabase();
	auth = createAuth({ db: open.db, sessionDays: 7 });
});
afterEach(async () => {
	vi.useRealTimers();
	await open.remove();
});

const person = (role: Role = 'operator', email = 'ada@example.org'): Promise<SessionUser> =>
	createUser(open.db, { email, name: 'Ada', role, password: PASSWORD, by: null, nowMs: T0 });
const signIn = (password = PASSWORD, email = 'ada@example.org', address = '192.0.2.1') =>
	auth.signIn({ email, password, address });
const refusalOf = (attempt: Promise<unknown>) =>
	attempt.then(
		() => null,
		(cause: unknown) => cause
	);
const sessions = () => open.db.selectFrom('session').selectAll().execute();
const trail = async () => (await open.db.selectFrom('audit_event').selectAll().execute()).map(({ act }) => act);
const after = (days: number) => vi.setSystemTime(T0 + days * DAY_MS);

describe('a session', () => {
	it('is stored as a hash only: the token is nowhere in the database', async () => {
		await person();
		const { token } = await signIn();
		const [row] = await sessions();
		expect(row?.id).toMatch(/^[0-9a-f]{64}$/);
		expect(['id', 'token'].map((what) => open.raw.serialize().includes(what === 'id' ? row!.id : token))).toEqual([
			true,
			false
		]);
		expect(await auth.validate(row!.id)).toBeNull();
		expect(await auth.validate(token)).toMatchObject({ sessionId: row!.id, user: { name: 'Ada', role: 'operator' } });
	});

	it('is a new one at each sign-in', async () => {
		await person();
		const [first, second] = [await signIn(), await signIn()];
		expect(first.token).not.toBe(second.token);
		expect(await sessions()).toHaveLength(2);
	});

	it('slides: once half its time is over a visit makes it whole again', async () => {
		await person();
		const { token } = await signIn();
		after(3);
		expect((await auth.validate(token))?.renewedUntil).toBeNull();
		after(4);
		expect((await auth.validate(token))?.renewedUntil).toEqual(new Date(T0 + 11 * DAY_MS));
		after(10.9);
		expect(await auth.validate(token)).not.toBeNull();
	});

	it('ends when nobody comes for its time, and is swept away', async () => {
		await person();
		const [left, { token }] = [await signIn(), await signIn()];
		after(7);
		expect(await auth.validate(token)).toBeNull();
		expect(await sessions()).toHaveLength(1);
		await auth.sweep();
		expect(await sessions()).toEqual([]);
		expect(await auth.validate(left.token)).toBeNull();
	});

	it('ends after four times its time, however busy', async () => {
		await person();
		const { token } = await signIn();
		for (let day = 4; day < 28; day += 4) {
			after(day);
			expect(await auth.validate(token)).not.toBeNull();
		}
		after(28);
		expect(await auth.validate(token)).toBeNull();
	});

	it('of a display lasts a year', async () => {
		await person('display');
		const { token, expiresAt } = await signIn();
		expect(expiresAt).toEqual(new Date(T0 + 365 * DAY_MS));
		after(300);
		expect(await auth.validate(token)).toMatchObject({ user: { role: 'display' } });
		after(600);
		expect(await auth.validate(token)).not.toBeNull();
	});

	it('ends with the sign-out, and no other does', async () => {
		await person();
		const [a, b] = [await signIn(), await signIn()];
		const id = (await auth.validate(a.token))!.sessionId;
		await auth.signOut(a.token);
		await auth.signOut(a.token);
		expect([await auth.validate(a.token), await auth.isLive(id)]).toEqual([null, false]);
		expect(await auth.validate(b.token)).not.toBeNull();
		expect((await trail()).filter((act) => act === 'sign_out')).toHaveLength(1);
	});

	it('of a person who was disabled is none', async () => {
		const { id } = await person();
		const { token } = await signIn();
		const { sessionId } = (await auth.validate(token))!;
		await open.db.updateTable('user').set({ disabled_at_ms: T0 }).where('id', '=', id).execute();
		expect([await auth.isLive(sessionId), await auth.validate(token)]).toEqual([false, null]);
	});

	it('shows a new role at once', async () => {
		await person();
		const { token } = await signIn();
		await open.db.updateTable('user').set({ role: 'manager' }).execute();
		expect((await auth.validate(token))?.user.role).toBe('manager');
	});

	it('goes on while the database refuses writes, though it cannot slide then', async () => {
		await person();
		const { token } = await signIn();
		after(5);
		const other = openDatabase(open.path);
		other.raw.exec('BEGIN IMMEDIATE');
		expect(await auth.validate(token)).not.toBeNull();
		other.raw.exec('ROLLBACK');
		await other.close();
	});
});

describe('signing in', () => {
	it('answers alike to a wrong password, an unknown address and a disabled person', async () => {
		await person();
		const { id } = await person('operator', 'gone@example.org');
		await open.db.updateTable('user').set({ disabled_at_ms: T0 }).where('id', '=', id).execute();
		const refusals = [
			await refusalOf(signIn('wrong password of some length')),
			await refusalOf(signIn(PASSWORD, 'nobody@example.org')),
			await refusalOf(signIn(PASSWORD, 'gone@example.org'))
		];
		for (const refusal of refusals) {
			expect(refusal).toMatchObject({ code: 'unauthenticated', message: 'Mail address or password is wrong.' });
		}
		expect(await sessions()).toEqual([]);
	});

	it('takes the mail address in any capitals and the password exactly', async () => {
		await person();
		expect((await signIn(PASSWORD, 'ADA@example.org')).user.email).toBe('ada@example.org');
		expect(await refusalOf(signIn(PASSWORD.toUpperCase()))).toMatchObject({ code: 'unauthenticated' });
	});

	it('writes down every attempt, but never what was typed in vain', async () => {
		await person();
		await signIn();
		await refusalOf(signIn('wrong password of some length'));
		await refusalOf(signIn('x', 'my secret typed into the wrong field'));
		const rows = await open.db.selectFrom('audit_event').select(['act', 'subject']).execute();
		expect(rows.slice(1)).toEqual([
			{ act: 'sign_in', subject: 'ada@example.org' },
			{ act: 'sign_in_refused', subject: 'ada@example.org' },
			{ act: 'sign_in_refused', subject: 'unknown' }
		]);
	});

	it('is limited after five wrong tries, whether or not the person exists, and opens again', async () => {
		await person();
		for (const email of ['ada@example.org', 'nobody@example.org']) {
			for (let i = 0; i < 5; i++) {
				expect(await refusalOf(signIn('wrong', email))).toMatchObject({ code: 'unauthenticated' });
			}
			expect(await refusalOf(signIn(PASSWORD, email))).toMatchObject({
				code: 'too_many_requests',
				details: { retry_after_s: 900 }
			});
		}
		expect(await refusalOf(signIn(PASSWORD, 'Ada@EXAMPLE.org'))).toMatchObject({ code: 'too_many_requests' });
		vi.setSystemTime(T0 + 15 * 60_000);
		expect((await signIn()).user.name).toBe('Ada');
	});

	it('is not limited for others: neither another address nor another person', async () => {
		await person();
		await person('operator', 'ben@example.org');
		for (let i = 0; i < 6; i++) await refusalOf(signIn('wrong'));
		expect((await signIn(PASSWORD, 'ada@example.org', '192.0.2.2')).token).toBeTruthy();
		expect((await signIn(PASSWORD, 'ben@example.org')).token).toBeTruthy();
	});

	it('that succeeds forgets the wrong tries', async () => {
		await person();
		for (let round = 0; round < 3; round++) {
			for (let i = 0; i < 4; i++) await refusalOf(signIn('wrong'));
			expect((await signIn()).token).toBeTruthy();
		}
	});
});

describe('passwords', () => {
	it('are stored as Argon2id with a salt of their own', async () => {
		const [a, b] = await Promise.all([hashPassword(PASSWORD), hashPassword(PASSWORD)]);
		expect(a).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/);
		expect(a).not.toBe(b);
		expect(await verifyPassword(a, PASSWORD)).toBe(true);
	});

	it('are never right for nobody, nor against a damaged hash', async () => {
		expect(await verifyPassword(null, 'nobody has this password')).toBe(false);
		expect(await verifyPassword('$argon2id$damaged', PASSWORD)).toBe(false);
	});

	it('have at least 15 characters, and 64 and spaces are fine', async () => {
		await expect(hashPassword('fourteen chars')).rejects.toMatchObject({ code: 'bad_input' });
		expect(await hashPassword(`${'long '.repeat(13)}`)).toBeTruthy();
	});

	it('cannot be had for an address twice', async () => {
		await person();
		await expect(person('admin', 'Ada@example.org')).rejects.toMatchObject({ code: 'conflict' });
	});
});

describe('API tokens', () => {
	const create = (user: SessionUser, role: Role) => createApiToken(open.db, { user, name: 'wall', role, nowMs: T0 });

	it('are stored as a hash only and say who they act for', async () => {
		const user = await insertTestUser(open.db, 'maintainer');
		const { id, token } = await create(user, 'operator');
		expect(open.raw.serialize().includes(token)).toBe(false);
		expect(await validateApiToken(open.db, token, T0)).toMatchObject({
			tokenId: id,
			user: { id: user.id, role: 'operator' }
		});
		expect(await trail()).toEqual(['api_token_created']);
	});

	it('cannot do more than their owner, at first and later', async () => {
		const user = await insertTestUser(open.db, 'operator');
		await expect(create(user, 'maintainer')).rejects.toMatchObject({ code: 'forbidden' });
		const { token } = await create(user, 'operator');
		await open.db.updateTable('user').set({ role: 'display' }).execute();
		expect((await validateApiToken(open.db, token, T0))?.user.role).toBe('display');
	});

	it('end when revoked and when their owner is disabled', async () => {
		const user = await insertTestUser(open.db, 'operator');
		const [a, b] = [await create(user, 'operator'), await create(user, 'operator')];
		await open.db.updateTable('api_token').set({ revoked_at_ms: T0 }).where('id', '=', a.id).execute();
		expect([await validateApiToken(open.db, a.token, T0), await isApiTokenLive(open.db, a.id)]).toEqual([null, false]);
		expect(await isApiTokenLive(open.db, b.id)).toBe(true);
		await open.db.updateTable('user').set({ disabled_at_ms: T0 }).execute();
		expect(await validateApiToken(open.db, b.token, T0)).toBeNull();
	});

	it('can be withdrawn by their owner and nobody else', async () => {
		const user = await insertTestUser(open.db, 'operator');
		const other = await insertTestUser(open.db, 'admin');
		const { id, token } = await create(user, 'operator');
		await expect(revokeApiToken(open.db, { user: other, id, nowMs: T0 })).rejects.toMatchObject({ code: 'not_found' });
		expect(await listApiTokens(open.db, user.id)).toEqual([expect.objectContaining({ id, name: 'wall' })]);
		await revokeApiToken(open.db, { user, id, nowMs: T0 });
		await revokeApiToken(open.db, { user, id, nowMs: T0 + 1 });
		expect(await validateApiToken(open.db, token, T0)).toBeNull();
		expect(await listApiTokens(open.db, user.id)).toEqual([]);
		expect(await trail()).toEqual(['api_token_created', 'api_token_revoked']);
	});

	it('note their last use once a minute', async () => {
		const { token } = await create(await insertTestUser(open.db, 'operator'), 'operator');
		const lastUse = async (atMs: number) => {
			await validateApiToken(open.db, token, atMs);
			return (await open.db.selectFrom('api_token').select('last_used_at_ms').executeTakeFirst())?.last_used_at_ms;
		};
		expect([await lastUse(T0), await lastUse(T0 + 59_000), await lastUse(T0 + 60_000)]).toEqual([T0, T0, T0 + 60_000]);
	});
});

describe('the cookie', () => {
	it.each([
		['http://127.0.0.1:3000/', 'elbowroom', false],
		['https://desk.example.org/', '__Host-elbowroom', true]
	])('at %s is %s, kept from scripts and from other sites', (address, name, secure) => {
		const url = new URL(address);
		const { cookies } = eventFor(new Request(url));
		setSessionCookie(cookies, url, 'token', new Date(T0));
		const { changes } = cookies as unknown as ReturnType<typeof import('../support/server.ts').cookieJar>;
		expect(changes.get(name)?.options).toEqual({
			path: '/',
			httpOnly: true,
			sameSite: 'lax',
			secure,
			expires: new Date(T0)
		});
		expect(readSessionCookie(cookies, url)).toBe('token');
		deleteSessionCookie(cookies, url);
		expect(readSessionCookie(cookies, url)).toBe('');
	});
});

describe('the sign-in form', () => {
	const submit = async (fields: Record<string, string>, { next = '', cookie = '' } = {}) => {
		const url = `http://127.0.0.1:3000/sign-in?next=${encodeURIComponent(next)}`;
		const request = new Request(url, { method: 'POST', body: new URLSearchParams(fields), headers: { cookie } });
		const event = eventFor(request);
		Object.assign(event.locals, { app: { auth }, user: null });
		try {
			const result = (await actions['default']!(event as never)) as unknown;
			return { result: result as { status: number; data: { form: { data: object; message: string } } }, event };
		} catch (redirect) {
			return { redirect: redirect as { status: number; location: string }, event };
		}
	};
	const fields = { email: ' ada@example.org ', password: PASSWORD };

	it('leads on to where somebody wanted to go, with a session', async () => {
		await person();
		const { redirect, event } = await submit(fields, { next: '/floors/a?select=robot:b' });
		expect(redirect).toMatchObject({ status: 303, location: '/floors/a?select=robot:b' });
		expect(await auth.validate(event.cookies.get('elbowroom')!)).toMatchObject({ user: { name: 'Ada' } });
	});

	it('leads nowhere outside', async () => {
		await person();
		expect((await submit(fields, { next: '//evil.example.org' })).redirect?.location).toBe('/');
	});

	it('ends the session that was open in this browser before', async () => {
		await person();
		const { token } = await signIn();
		await submit(fields, { cookie: `elbowroom=${token}` });
		expect(await auth.validate(token)).toBeNull();
		expect(await sessions()).toHaveLength(1);
	});

	it('says what was wrong and never sends the password back', async () => {
		await person();
		const { result } = await submit({ ...fields, password: 'wrong but long enough' });
		expect(result).toMatchObject({ status: 401, data: { form: { message: 'Mail address or password is wrong.' } } });
		expect(JSON.stringify(result)).not.toContain('wrong but long enough');
		expect((await submit({ email: '', password: '' })).result).toMatchObject({ status: 400 });
	});

	it('says when to try again', async () => {
		await person();
		for (let i = 0; i < 5; i++) await submit({ ...fields, password: 'wrong' });
		expect((await submit(fields)).result).toMatchObject({ status: 429 });
	});
});
