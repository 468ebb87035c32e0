import { expect, it } from 'vitest';
import { chiSquareGate, mahalanobisSquared } from './gating.ts';

it('is −2 ln(1 − p) for a position (χ² tables)', () => {
	expect(chiSquareGate(0.95, 2)).toBeCloseTo(5.991464547, 9);
	expect(chiSquareGate(0.99, 2)).toBeCloseTo(9.210340372, 9);
	expect(chiSquareGate(0.999, 2)).toBeCloseTo(13.815510558, 9);
});

it('trap: the gate depends on the degrees of freedom (χ² tables)', () => {
	expect(chiSquareGate(0.95, 1)).toBeCloseTo(3.841458821, 8);
	expect(chiSquareGate(0.99, 4)).toBeCloseTo(13.276704136, 8);
});

it('is not a number outside its range', () => {
	expect(chiSquareGate(1.1, 2)).toBeNaN();
	expect(chiSquareGate(0.5, 0)).toBeNaN();
	expect(chiSquareGate(NaN, 2)).toBeNaN();
});

it('trap: the same metres are near along the long axis and far across it', () => {
	const long = { xx: 1, xy: 0, yy: 0.01 };
	expect(mahalanobisSquared(0.5, 0, long)).toBeCloseTo(0.25, 12);
	expect(mahalanobisSquared(0, 0.5, long)).toBeCloseTo(25, 12);
});

it('takes the correlation into account', () => {
	const s = { xx: 0.04, xy: 0.03, yy: 0.04 };
	expect(mahalanobisSquared(0.3, 0.4, s)).toBeCloseTo(4, 12);
	expect(mahalanobisSquared(0.3, -0.4, s)).toBeCloseTo(24.571428571, 9);
});

it('holds nothing to be near when the covariance is singular', () => {
	expect(mahalanobisSquared(0, 0, { xx: 0, xy: 0, yy: 0 })).toBe(Infinity);
	expect(mahalanobisSquared(1, 1, { xx: 1, xy: 1, yy: 1 })).toBe(Infinity);
});
