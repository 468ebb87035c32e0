/** Signing in and out, and who a request comes from. Lucia is used here and in the adapter only. */

import type { Kysely } from 'kysely';
import { Lucia, TimeSpan } from 'lucia';
import { Failure } from '../../domain/failure.ts';
import type { Database, Role } from '../db/schema.ts';
import { writeTransaction } from '../db/transaction.ts';
import { insertAuditEvent, readUserByEmail } from '../repositories/users.ts';
import type { Metrics } from '../telemetry/metrics.ts';
import { verifyPassword } from './passwords.ts';
import { createRateLimit } from './rate-limit.ts';
import { generateSecret, hashSecret } from './secrets.ts';
import { SessionAdapter } from './session-adapter.ts';

export interface SessionUser {
	readonly id: string;
	readonly email: string;
	readonly name: string;
	readonly role: Role;
}

interface SignedIn {
	readonly user: SessionUser;
	/** Goes into the cookie and nowhere else. */
	readonly token: string;
	readonly expiresAt: Date;
}

interface Validated {
	readonly user: SessionUser;
	/** Stored id of the session, not the token */
	readonly sessionId: string;
	/** New end of the session when this request made it longer, else null */
	readonly renewedUntil: Date | null;
}

export interface Auth {
	/**
	 * Opens a new session.
	 *
	 * @throws Failure 'unauthenticated', with the same words whoever or whatever was wrong
	 * @throws Failure 'too_many_requests' with `details.retry_after_s`
	 */
	signIn(attempt: { email: string; password: string; address: string }): Promise<SignedIn>;
	/** The session a token belongs to, or null; makes it longer once half of its time is over. */
	validate(token: string): Promise<Validated | null>;
	/** Ends the session of a token; one that has ended already stays so. */
	signOut(token: string): Promise<void>;
	/** Whether a session still stands. Does not make it longer. */
	isLive(sessionId: string): Promise<boolean>;
	/** Removes sessions whose time is over. */
	sweep(): Promise<void>;
}

/** A wall screen is a device nobody types at: it stays signed in, and can only look. */
const DISPLAY_DAYS = 365;

/** However busy, a session ends after this many times its idle time, and the person signs in again. Chosen by us. */
const LONGEST_IN_IDLE_TIMES = 4;

const DAY_MS = 86_400_000;
const WINDOW_MS = 15 * 60_000;

/** Tries in 15 min: for one mail address from one network address, and from one network address in all. Chosen by us. */
const TRIES = { person: 5, address: 50 };

export interface AuthParts {
	readonly db: Kysely<Database>;
	readonly sessionDays: number;
	readonly metrics?: Pick<Metrics, 'countSignIn'>;
	/** ms since the epoch; Lucia reads the system clock too, so only that makes sense outside tests of the limits */
	readonly now?: () => number;
}

export function createAuth({ db, sessionDays, metrics, now = Date.now }: AuthParts): Auth {
	const adapter = new SessionAdapter(db, now);
	const lasting = (days: number) =>
		new Lucia(adapter, {
			sessionExpiresIn: new TimeSpan(days * DAY_MS, 'ms'),
			getSessionAttributes: ({ createdAtMs }) => ({ createdAtMs }),
			getUserAttributes: ({ email, name, role }) => ({ email, name, role })
		});
	const desk = lasting(sessionDays);
	const display = lasting(DISPLAY_DAYS);
	const luciaFor = (role: Role) => (role === 'display' ? display : desk);

	const perPerson = createRateLimit(TRIES.person, WINDOW_MS);
	const perAddress = createRateLimit(TRIES.address, WINDOW_MS);

	return {
		async signIn({ email, password, address }) {
			const person = `${address} ${email.toLowerCase()}`;
			const wait = Math.max(perAddress.take(address, now()), perPerson.take(person, now()));
			if (wait > 0) {
				metrics?.countSignIn('limited');
				const retry_after_s = Math.ceil(wait / 1000);
				throw new Failure('too_many_requests', 'Too many tries. Wait a few minutes, then try again.', {
					retry_after_s
				});
			}

			const found = await readUserByEmail(db, email);
			const known = found?.disabled_at_ms === null ? found : null;
			const right = await verifyPassword(known?.password_hash ?? null, password);
			if (known === null || !right) {
				metrics?.countSignIn('refused');
				// What was typed may be a password in the wrong field, so only an address we know is written down.
				await audit(found?.id ?? null, 'sign_in_refused', found?.email ?? 'unknown', { address });
				throw new Failure('unauthenticated', 'Mail address or password is wrong.');
			}

			const token = generateSecret();
			const session = await luciaFor(known.role).createSession(known.id, { createdAtMs: now() }, { sessionId: token });
			await audit(known.id, 'sign_in', known.email, { address });
			perPerson.reset(person);
			metrics?.countSignIn('accepted');
			const { id, name, role } = known;
			return { user: { id, email: known.email, name, role }, token, expiresAt: session.expiresAt };
		},

		async validate(token) {
			const [stored, owner] = await adapter.getSessionAndUser(token);
			if (stored === null) return null;
			const role = owner?.attributes.role ?? 'operator';
			const longestMs = LONGEST_IN_IDLE_TIMES * sessionDays * DAY_MS;
			if (role !== 'display' && now() - stored.attributes.createdAtMs >= longestMs) {
				await adapter.deleteSession(token);
				return null;
			}
			const { session, user } = await luciaFor(role).validateSession(token);
			if (session === null) return null;
			const { id, email, name } = user;
			return {
				user: { id, email, name, role: user.role },
				sessionId: hashSecret(token),
				renewedUntil: session.fresh ? session.expiresAt : null
			};
		},

		async signOut(token) {
			const validated = await adapter.getSessionAndUser(token);
			await adapter.deleteSession(token);
			const user = validated[1];
			if (user !== null) await audit(user.id, 'sign_out', user.attributes.email, {});
		},

		async isLive(sessionId) {
			const row = await db
				.selectFrom('session')
				.innerJoin('user', 'user.id', 'session.user_id')
				.select('session.id')
				.where('session.id', '=', sessionId)
				.where('session.expires_at_ms', '>', now())
				.where('user.disabled_at_ms', 'is', null)
				.executeTakeFirst();
			return row !== undefined;
		},

		sweep: () => adapter.deleteExpiredSessions()
	};

	async function audit(actor: string | null, act: string, subject: string, detail: Record<string, unknown>) {
		await writeTransaction(db, (trx) =>
			insertAuditEvent(trx, { at_ms: now(), actor_user_id: actor, act, subject, detail })
		);
	}
}
