import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import type { Polygon } from '../geometry/types.ts';
import { createKernelDensity, kernelMass, kernelWeight } from './kernel.ts';
import { owensT } from './owens-t.ts';

const ROOM: Polygon = {
	outer: [
		[0, 0],
		[10, 0],
		[10, 10],
		[0, 10]
	],
	holes: [
		[
			[6, 6],
			[8, 6],
			[8, 8]
		]
	]
};
const one = { points: Float64Array.of(5, 3), velocities: null, walkable: ROOM, radius: 1 };

// Helbing, Johansson & Al-Abideen 2007 (from memory): f(d) = exp(−d²/R²)/(πR²).
describe('kernel', () => {
	it('holds 63 % within R: R is not σ, which is R/√2', () => {
		const steps = 20_000;
		let within = 0;
		for (let k = 0; k < steps; k++) {
			const d = (k + 0.5) / steps;
			within += (2 * Math.PI * d * kernelWeight(d * d, 1)) / steps;
		}
		expect(within).toBeCloseTo(1 - Math.exp(-1), 8);
		expect(kernelWeight(0, 2)).toBeCloseTo(1 / (Math.PI * 4), 12);
		expect(kernelWeight(1, Math.SQRT2)).toBeCloseTo(Math.exp(-0.5) / (2 * Math.PI), 12);
	});

	it('is halved at a wall and quartered in a corner unless corrected', () => {
		expect(kernelMass(ROOM, 5, 0, 0.7)).toBeCloseTo(0.5, 12);
		expect(kernelMass(ROOM, 0, 0, 1)).toBeCloseTo(0.25, 12);
		const corner = createKernelDensity({ ...one, points: Float64Array.of(0, 0) }).at(0, 0);
		expect(corner.uncorrected * 4).toBeCloseTo(corner.correctedPerPerson, 12);
		expect(corner.correctedAtPoint).toBeCloseTo(corner.correctedPerPerson, 12);
	});

	it('has all of its weight on a floor that is large, none on one far away, either way round', () => {
		expect(kernelMass({ ...ROOM, holes: [] }, 5, 5, 0.3)).toBeCloseTo(1, 12);
		expect(kernelMass({ outer: [...ROOM.outer].reverse(), holes: [] }, 5, 5, 0.3)).toBeCloseTo(1, 12);
		expect(kernelMass(ROOM, 50, 50, 1)).toBeCloseTo(0, 12);
	});

	it('is a product of error functions on a rectangle: erf(1)² at the centre of a 2R square', () => {
		const square: Polygon = {
			outer: [
				[-1, -1],
				[1, -1],
				[1, 1],
				[-1, 1]
			],
			holes: []
		};
		// erf(1) = 0.842700792949715, Abramowitz & Stegun table 7.1 (from memory).
		expect(kernelMass(square, 0, 0, 1)).toBeCloseTo(0.842700792949715 ** 2, 12);
	});
});

describe('Owen’s T', () => {
	it('has its closed values: T(0, a) = atan(a)/2π, T(h, 1) = Φ(h)(1 − Φ(h))/2, T(h, ∞) = (1 − Φ(h))/2', () => {
		expect(owensT(0, 0.7)).toBeCloseTo(Math.atan(0.7) / (2 * Math.PI), 14);
		expect(owensT(0, 7)).toBeCloseTo(Math.atan(7) / (2 * Math.PI), 14);
		// Φ(1) = 0.841344746068543, Abramowitz & Stegun table 26.1 (from memory).
		const phi = 0.841344746068543;
		expect(owensT(1, 1)).toBeCloseTo((phi * (1 - phi)) / 2, 13);
		expect(owensT(1, 1e9)).toBeCloseTo((1 - phi) / 2, 13);
		expect(owensT(1, -1)).toBeCloseTo(-(phi * (1 - phi)) / 2, 13);
	});

	it('agrees with summing the integrand finely', () => {
		const argument = fc.double({ min: 0, max: 6, noNaN: true });
		fc.assert(
			fc.property(argument, argument, (h, a) => {
				const steps = 4000;
				let total = 0;
				for (let k = 0; k < steps; k++) {
					const x = (a * (k + 0.5)) / steps;
					total += Math.exp((-h * h * (1 + x * x)) / 2) / (1 + x * x);
				}
				expect(owensT(h, a)).toBeCloseTo((total * a) / steps / (2 * Math.PI), 6);
			}),
			{ numRuns: 50 }
		);
	});
});

describe('density at a point', () => {
	it('is 0, not unknown, without anybody; coincident persons add', () => {
		expect(createKernelDensity({ ...one, points: new Float64Array() }).at(5, 5).correctedPerPerson).toBe(0);
		const three = createKernelDensity({ ...one, points: Float64Array.of(3, 3, 3, 3, 3, 3) }).at(3, 3);
		expect(three.uncorrected).toBeCloseTo(3 / Math.PI, 12);
	});

	it('integrates to the number of persons by the per-person form only', () => {
		const density = createKernelDensity({ ...one, points: Float64Array.of(0.2, 0.3, 5.5, 6.4, 9.9, 5) });
		let perPerson = 0;
		let uncorrected = 0;
		const step = 0.05;
		for (let x = step / 2; x < 10; x += step) {
			for (let y = step / 2; y < 10; y += step) {
				if (x > 6 && x < 8 && y > 6 && y < x) continue;
				const value = density.at(x, y);
				perPerson += value.correctedPerPerson * step * step;
				uncorrected += value.uncorrected * step * step;
			}
		}
		expect(perPerson).toBeCloseTo(3, 2);
		expect(uncorrected).toBeLessThan(2.4);
	});

	it('leaves out positions that are not numbers', () => {
		const density = createKernelDensity({ ...one, points: Float64Array.of(NaN, 1, 5, 3) });
		expect(density.massAtPersons[0]).toBeNull();
		expect(density.at(5, 3).uncorrected).toBeCloseTo(1 / Math.PI, 12);
	});

	it('gives velocity, flow and pressure, and null without velocities', () => {
		const pair = { ...one, points: Float64Array.of(5, 3, 5, 3), velocities: Float64Array.of(1, 0, -0.5, 0) };
		const { motion, uncorrected } = createKernelDensity(pair).at(5, 3);
		expect(motion!.velocity[0]).toBeCloseTo(0.25, 12);
		expect(motion!.flow[0]).toBeCloseTo(0.25 * uncorrected, 12);
		expect(motion!.velocityVariance).toBeCloseTo(0.5625, 12);
		expect(motion!.pressure).toBeCloseTo(0.5625 * uncorrected, 12);
		expect(createKernelDensity(one).at(5, 3).motion).toBeNull();
	});

	it('refuses a radius that is not positive', () => {
		expect(() => createKernelDensity({ ...one, radius: 0 })).toThrow(Failure);
	});
});
