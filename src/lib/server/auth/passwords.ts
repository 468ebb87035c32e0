/** Passwords of people: Argon2id. */

import { hash, verify } from '@node-rs/argon2';
import { Failure } from '../../domain/failure.ts';

/**
 * Argon2id with m = 19 MiB, t = 2, p = 1 (OWASP password storage cheat sheet, figures from memory).
 * Algorithm 2 is Argon2id; the package's enum of it does not exist at run time.
 */
const OPTIONS = { algorithm: 2, memoryCost: 19 * 1024, timeCost: 2, parallelism: 1 } as const;

/** With a password as the only factor, NIST SP 800-63B-4 asks for 15 characters and at least 64 to be allowed. */
const PASSWORD_LENGTH = { min: 15, max: 256 } as const;

/** Hash to store. @throws Failure 'bad_input' when the password is too short or too long */
export async function hashPassword(password: string): Promise<string> {
	if (password.length < PASSWORD_LENGTH.min || password.length > PASSWORD_LENGTH.max) {
		throw new Failure(
			'bad_input',
			`A password has ${PASSWORD_LENGTH.min} to ${PASSWORD_LENGTH.max} characters; a few words with spaces are fine.`
		);
	}
	return hash(password, OPTIONS);
}

/** Checked when there is no such person, so that the answer takes as long as for one who exists. */
let nobody: Promise<string> | undefined;

/** Whether the password belongs to the stored hash; null stands for an unknown person and is never right. */
export async function verifyPassword(stored: string | null, password: string): Promise<boolean> {
	if (password.length > PASSWORD_LENGTH.max) return false;
	nobody ??= hash('nobody has this password', OPTIONS);
	try {
		const right = await verify(stored ?? (await nobody), password);
		return right && stored !== null;
	} catch {
		// A damaged hash lets nobody in.
		return false;
	}
}
