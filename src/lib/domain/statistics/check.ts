/** What every statistic asks of its input. A breach is a caller's mistake and throws Failure 'bad_input'. */

import { Failure } from '../failure.ts';

/** The value, if it is a whole number ≥ 0. */
export function requireCount(value: number, name: string): number {
	if (!Number.isInteger(value) || value < 0) throw bad(`${name} must be a whole number of at least 0, not ${value}.`);
	return value;
}

/** The value, if it is finite and ≥ 0. */
export function requireAmount(value: number, name: string): number {
	if (!Number.isFinite(value) || value < 0) throw bad(`${name} must be a finite number of at least 0, not ${value}.`);
	return value;
}

/** The value, if it is finite and above 0. */
export function requirePositive(value: number, name: string): number {
	if (!Number.isFinite(value) || value <= 0) throw bad(`${name} must be a finite number above 0, not ${value}.`);
	return value;
}

/** The value, if it lies strictly between 0 and 1. */
export function requireShare(value: number, name: string): number {
	if (!(value > 0 && value < 1)) throw bad(`${name} must lie between 0 and 1, not ${value}.`);
	return value;
}

/** Throws when two columns of one table differ in length. */
export function requireSameLength(a: ArrayLike<unknown>, b: ArrayLike<unknown>, names: string): void {
	if (a.length !== b.length) throw bad(`${names} must be equally long, not ${a.length} and ${b.length}.`);
}

export const bad = (message: string): Failure => new Failure('bad_input', message);
