import fc from 'fast-check';
import { expect, it } from 'vitest';
import {
	checkRobotSecret,
	generateRobotSecret,
	hashForMosquitto,
	hashRobotSecret,
	robotSecretHashes
} from './credentials.ts';

it('hashes with SHA-256 (FIPS 180-2, appendix B.1: "abc")', () => {
	expect(hashRobotSecret('abc')).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
});

it('accepts the secret it was made from, as text and as the bytes MQTT brings', () => {
	const secret = generateRobotSecret();
	const hash = hashRobotSecret(secret);
	expect(checkRobotSecret(secret, hash)).toBe(true);
	expect(checkRobotSecret(Buffer.from(secret), hash)).toBe(true);
});

it('accepts no other text', () => {
	const hash = hashRobotSecret('the one');
	fc.assert(
		fc.property(fc.string(), (other) => {
			fc.pre(other !== 'the one');
			expect(checkRobotSecret(other, hash)).toBe(false);
		})
	);
});

it('takes a malformed hash for one that nothing matches', () => {
	for (const hash of ['', 'abc', 'zz'.repeat(32), '00'.repeat(31), '00'.repeat(33)]) {
		expect(checkRobotSecret('', hash)).toBe(false);
	}
});

it('makes secrets of at least 128 bits that do not repeat', () => {
	const secrets = Array.from({ length: 1000 }, generateRobotSecret);
	expect(new Set(secrets).size).toBe(1000);
	for (const secret of secrets) expect(secret).toMatch(/^[\w-]{32}$/);
});

it('writes the hash as mosquitto_passwd of Mosquitto 2.0.11 does', () => {
	// Made with `mosquitto_passwd -b FILE robot sea-lavender`; the salt is the one it chose.
	const line = hashForMosquitto('sea-lavender', Buffer.from('ikzz4NqmIR1Qe1uY', 'base64'));
	expect(line).toBe(
		'$7$101$ikzz4NqmIR1Qe1uY$0LDMCBeZkuUMiO1Y3ZMEpzximeontjqctb4DaVxofabuSRpqyCYLuDHJhGG/7q5yg9mBCVSKNNRUAwxipVXzqA=='
	);
});

it('salts every hash anew', () => {
	expect(robotSecretHashes('x').mosquitto_hash).not.toBe(robotSecretHashes('x').mosquitto_hash);
});
