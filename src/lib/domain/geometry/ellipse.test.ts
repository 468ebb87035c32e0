import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import {
	chiSquare2Quantile,
	coverageOfSigmas,
	ellipseOfCovariance,
	ellipseOfSample,
	f2Quantile,
	isInsideEllipse,
	mahalanobisSquared
} from './ellipse.ts';

describe('quantiles', () => {
	// Bar-Shalom, Li & Kirubarajan 2001, gates of 2 degrees of freedom (from memory).
	it('gives the χ² gates 5.991464547, 9.210340372 and 13.815510558', () => {
		expect(chiSquare2Quantile(0.95)).toBeCloseTo(5.991464547, 9);
		expect(chiSquare2Quantile(0.99)).toBeCloseTo(9.210340372, 9);
		expect(chiSquare2Quantile(0.999)).toBeCloseTo(13.815510558, 9);
	});

	// Printed F tables, 5 % points for 2 and d degrees (from memory): d = 1: 199.5, 2: 19.00, 5: 5.79, 10: 4.10.
	it('gives the printed 5 % points of F with 2 and d degrees, and χ²/2 in the limit', () => {
		expect(f2Quantile(0.95, 1)).toBeCloseTo(199.5, 1);
		expect(f2Quantile(0.95, 2)).toBeCloseTo(19, 10);
		expect(f2Quantile(0.95, 5)).toBeCloseTo(5.79, 2);
		expect(f2Quantile(0.95, 10)).toBeCloseTo(4.1, 2);
		expect(f2Quantile(0.95, 1e9)).toBeCloseTo(5.991464547 / 2, 6);
	});
});

describe('what naive code gets wrong', () => {
	it('k-sigma ellipses cover 39.3, 86.5 and 98.9 %', () => {
		expect([1, 2, 3].map((k) => (100 * coverageOfSigmas(k)).toFixed(1))).toEqual(['39.3', '86.5', '98.9']);
	});

	it('two or collinear points give a semi-minor axis of 0, one point none at all', () => {
		expect(
			ellipseOfSample([
				[0, 0],
				[3, 4]
			])!.semiMinor
		).toBeCloseTo(0, 6);
		expect(
			ellipseOfSample([
				[0, 0],
				[0.1, 0.1],
				[0.3, 0.3],
				[0.7, 0.7]
			])!.semiMinor
		).toBeCloseTo(0, 6);
		expect(
			ellipseOfSample([
				[0, 0],
				[3, 4]
			])!.smallSample
		).toBeNull();
		expect(ellipseOfSample([[1, 1]])).toBeNull();
		expect(ellipseOfSample([])).toBeNull();
	});

	it('a circle has no direction', () => {
		expect(ellipseOfCovariance([1, 0, 1]).angle).toBeNull();
		expect(ellipseOfSample(Array.from({ length: 5 }, () => [2, 3] as const))!.angle).toBeNull();
		expect(ellipseOfCovariance([1, 0, 4]).angle).toBeCloseTo(Math.PI / 2, 12);
		expect(ellipseOfCovariance([1, -0, 4]).angle).toBeCloseTo(Math.PI / 2, 12);
		expect(ellipseOfCovariance([2, -1, 2]).angle).toBeCloseTo(-Math.PI / 4, 12);
	});

	it('the mean has a far smaller ellipse than the points, and few points a far larger one than χ² says', () => {
		const three = ellipseOfSample([
			[0, 0],
			[1, 0.2],
			[0.4, 0.9]
		])!;
		expect(three.smallSample!.predictionK2).toBeGreaterThan(50 * three.k2);
		expect(three.smallSample!.predictionK2 / three.smallSample!.meanK2).toBeCloseTo(4, 12);
	});

	it('is the same at map coordinates of 10⁶ m', () => {
		const near = [
			[0.5, 1.25],
			[2, 0.75],
			[1.5, 3],
			[4.25, 2]
		] as const;
		const far = near.map(([x, y]) => [x + 1e6, y - 1e6] as const);
		ellipseOfSample(near)!.covariance.forEach((value, i) => {
			expect(ellipseOfSample(far)!.covariance[i]).toBeCloseTo(value, 9);
		});
	});
});

it('measures Mahalanobis distances, and Infinity off a singular covariance', () => {
	expect(mahalanobisSquared([2, 1, 2], 3, 3)).toBeCloseTo(6, 12);
	expect(isInsideEllipse([2, 1, 2], 2.4, 2.4)).toBe(true);
	expect(isInsideEllipse([2, 1, 2], 3, 3)).toBe(false);
	expect(mahalanobisSquared([1, 1, 1], 1, 1)).toBeCloseTo(1, 12);
	expect(mahalanobisSquared([1, 1, 1], 1, 0)).toBe(Infinity);
	expect(mahalanobisSquared([0, 0, 0], 0, 0)).toBe(0);
	expect(mahalanobisSquared([0, 0, 0], 1e-3, 0)).toBe(Infinity);
});

it('refuses a share of 1 and a covariance that is not finite', () => {
	expect(() => ellipseOfCovariance([1, 0, 1], 1)).toThrow(Failure);
	expect(() => ellipseOfCovariance([NaN, 0, 1])).toThrow(Failure);
});

it('has its border at distance k² in the direction of the major axis', () => {
	const variance = fc.double({ min: 0.01, max: 10, noNaN: true });
	fc.assert(
		fc.property(variance, variance, fc.double({ min: -0.95, max: 0.95, noNaN: true }), (xx, yy, rho) => {
			const xy = rho * Math.sqrt(xx * yy);
			const { semiMajor, angle, k2 } = ellipseOfCovariance([xx, xy, yy]);
			fc.pre(angle !== null);
			const d2 = mahalanobisSquared([xx, xy, yy], semiMajor * Math.cos(angle!), semiMajor * Math.sin(angle!));
			expect(d2 / k2).toBeCloseTo(1, 7);
		})
	);
});
