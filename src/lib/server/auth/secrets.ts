/** Random secrets and what is stored of them. */

import { createHash, randomBytes, timingSafeEqual } from 'node:crypto';

/** 256 random bits as URL-safe text. */
export const generateSecret = (): string => randomBytes(32).toString('base64url');

/**
 * SHA-256 as hex: all that is stored of a secret. A secret of 128 random bits or more cannot be guessed, so the slow
 * hash that passwords need would only cost time here.
 */
export const hashSecret = (secret: string): string => createHash('sha256').update(secret).digest('hex');

/** Compares without telling by its duration how much was right. */
export const sameSecret = (a: string, b: string): boolean =>
	timingSafeEqual(Buffer.from(hashSecret(a)), Buffer.from(hashSecret(b)));
