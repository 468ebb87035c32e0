import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	computeCapacity,
	densityOfSpeed,
	FREE_SPEED,
	flowOfDensity,
	JAM_DENSITY,
	speedOfDensity
} from './fundamental-diagram.ts';

// Weidmann 1993 in Kladek's form, parameters 1.34 m/s, 1.913 and 5.4 persons/m² as restated by Kretz et al. 2016.
describe('Weidmann', () => {
	it('walks 1.0581, 0.6062 and 0.1563 m/s at 1, 2 and 4 persons/m²', () => {
		expect([1, 2, 4].map((density) => speedOfDensity(density).toFixed(4))).toEqual(['1.0581', '0.6062', '0.1563']);
	});

	it('has its capacity of 1.22492 persons/(m·s) at 1.75067 persons/m² and 0.69969 m/s', () => {
		const { density, flow, speed } = computeCapacity();
		expect(flow).toBeCloseTo(1.22492, 5);
		expect(60 * flow).toBeCloseTo(73.5, 2);
		expect(density).toBeCloseTo(1.75067, 5);
		expect(speed).toBeCloseTo(0.69969, 5);
	});
});

describe('what naive code gets wrong', () => {
	it('clamps: free speed at 0, none from 5.4 persons/m² on, where the formula goes negative', () => {
		expect(speedOfDensity(0)).toBe(FREE_SPEED);
		expect(speedOfDensity(-1)).toBe(FREE_SPEED);
		expect(speedOfDensity(JAM_DENSITY)).toBe(0);
		expect(speedOfDensity(8)).toBe(0);
		expect(flowOfDensity(0)).toBe(0);
		expect(flowOfDensity(-1)).toBe(0);
		expect(densityOfSpeed(1.5)).toBe(0);
		expect(densityOfSpeed(0)).toBe(JAM_DENSITY);
		expect(speedOfDensity(NaN)).toBeNaN();
		expect(densityOfSpeed(NaN)).toBeNaN();
	});

	it('flow occurs at two densities, so it cannot tell a free crowd from a jam', () => {
		const free = flowOfDensity(0.5);
		const jammed = [...Array(400).keys()].map((k) => 2 + k / 120).find((density) => flowOfDensity(density) <= free)!;
		expect(jammed).toBeGreaterThan(3);
		expect(flowOfDensity(jammed)).toBeCloseTo(free, 1);
	});

	it('level design flow of 82 persons/(m·min) is above this capacity: sources are not interchangeable', () => {
		// Guide to Safety at Sports Grounds, as quoted by the regulator.
		expect(82 / 60).toBeGreaterThan(computeCapacity().flow);
	});
});

it('finds the density back from its speed', () => {
	fc.assert(
		fc.property(fc.double({ min: 0.3, max: 5.39, noNaN: true }), (density) => {
			expect(densityOfSpeed(speedOfDensity(density))).toBeCloseTo(density, 6);
		})
	);
});

it('never flows more than its capacity', () => {
	const { flow } = computeCapacity();
	fc.assert(
		fc.property(fc.double({ min: 0, max: 10, noNaN: true }), (density) => {
			expect(flowOfDensity(density)).toBeLessThanOrEqual(flow + 1e-12);
		})
	);
});
