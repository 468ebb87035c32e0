/** The door in front of every endpoint, load and action. */

import { error } from '@sveltejs/kit';
import { Failure } from '../../domain/failure.ts';
import { hasRole, type Purpose, type Role } from '../auth/roles.ts';
import type { SessionUser } from '../auth/sessions.ts';

/**
 * The person a request comes from, if they may do what `needed` may do.
 *
 * @throws Failure 'unauthenticated' or 'forbidden'
 */
export function requireRole(
	locals: { readonly user: SessionUser | null },
	needed: Role,
	purpose: Purpose = 'change'
): SessionUser {
	if (locals.user === null) throw new Failure('unauthenticated', 'Sign in, or send a valid token.');
	if (!hasRole(locals.user, needed, purpose)) {
		throw new Failure('forbidden', `This needs the role ${needed}; yours is ${locals.user.role}.`);
	}
	return locals.user;
}

/** The same for pages and form actions, where Kit shows the error page. */
export function requirePageRole(
	locals: { readonly user: SessionUser | null },
	needed: Role,
	purpose: Purpose = 'change'
): SessionUser {
	try {
		return requireRole(locals, needed, purpose);
	} catch (cause) {
		if (!(cause instanceof Failure)) throw cause;
		error(cause.code === 'unauthenticated' ? 401 : 403, { message: cause.message, code: cause.code });
	}
}
