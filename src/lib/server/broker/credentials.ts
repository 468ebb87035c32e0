/** Secrets of robots: made by us, shown once, kept as hashes only. */

import { createHash, pbkdf2Sync, randomBytes, timingSafeEqual } from 'node:crypto';

const SECRET_BYTES = 24;
const SALT_BYTES = 12;
/** What `mosquitto_passwd` of Mosquitto 2.0 uses; more would buy nothing for a secret that cannot be guessed. */
const MOSQUITTO_ITERATIONS = 101;

/** A credential that may sign in. */
export interface RobotCredential {
	/** Row id: a robot may have an old and a new secret at once while it is being changed over. */
	readonly id: number;
	readonly venue: string;
	readonly robot: string;
	/** From `hashRobotSecret` */
	readonly passwordHash: string;
	/** From `hashForMosquitto`; null when the robot cannot be let into an external Mosquitto */
	readonly mosquittoHash: string | null;
}

/** What a robot signs in with; also its MQTT client id. */
export const robotUsername = (venue: string, robot: string): string => `${venue}/${robot}`;

/** A new secret: 192 random bits as 32 URL-safe characters. */
export const generateRobotSecret = (): string => randomBytes(SECRET_BYTES).toString('base64url');

/**
 * SHA-256 of a secret, 64 hex digits, for `robot_credential.password_hash`.
 *
 * A fast hash is right here, unlike for the passwords of people: slow hashes make guessing expensive, and nobody
 * guesses 192 random bits. It lets 200 robots reconnect in the same second without holding up the broker.
 */
export const hashRobotSecret = (secret: string | Uint8Array): string => digest(secret).toString('hex');

/**
 * Whether `secret` is the one `hash` was made from. Takes the same time wherever the two differ; a malformed hash
 * matches nothing.
 */
export function checkRobotSecret(secret: string | Uint8Array, hash: string): boolean {
	const expected = Buffer.from(hash, 'hex');
	const given = digest(secret);
	return expected.length === given.length && timingSafeEqual(given, expected);
}

/** The same secret as Mosquitto 2 keeps it in a password file: `$7$iterations$salt$PBKDF2-SHA512`, base64. */
export function hashForMosquitto(secret: string, salt: Uint8Array = randomBytes(SALT_BYTES)): string {
	const hash = pbkdf2Sync(secret, salt, MOSQUITTO_ITERATIONS, 64, 'sha512');
	return `$7$${MOSQUITTO_ITERATIONS}$${Buffer.from(salt).toString('base64')}$${hash.toString('base64')}`;
}

/** Both columns of `robot_credential` for one secret; neither can be made later, since the secret is not kept. */
export const robotSecretHashes = (secret: string): { password_hash: string; mosquitto_hash: string } => ({
	password_hash: hashRobotSecret(secret),
	mosquitto_hash: hashForMosquitto(secret)
});

const digest = (secret: string | Uint8Array): Buffer => createHash('sha256').update(secret).digest();
