import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { chiSquareGate } from './gating.ts';
import { diagonalCovariance, predict, processNoise, update, type KalmanState } from './kalman.ts';

const start: KalmanState = { x: 0, y: 0, vx: 1, vy: 0, covariance: diagonalCovariance([0.04, 0.04, 1, 1]) };
const noise = { xx: 0.01, xy: 0, yy: 0.01 };

describe('process noise', () => {
	it('is q [[dt³/3, dt²/2], [dt²/2, dt]] (Bar-Shalom, Li & Kirubarajan 2001, from memory)', () => {
		expect(processNoise(0.5, 1)).toEqual({ position: 0.125 / 3, cross: 0.125, velocity: 0.5 });
		expect(processNoise(0.5, 2, 'discrete')).toEqual({ position: 0.0625, cross: 0.25, velocity: 1 });
	});

	it('trap: with uneven timing only the continuous model is consistent', () => {
		const nothing = { ...start, covariance: new Float64Array(16) };
		const inTwo = (model: 'continuous' | 'discrete') =>
			predict(predict(nothing, 0.5, 1, model), 0.5, 1, model).covariance;
		const inOne = (model: 'continuous' | 'discrete') => predict(nothing, 1, 1, model).covariance;
		expect(inTwo('continuous')[0]).toBeCloseTo(inOne('continuous')[0]!, 14);
		expect(inTwo('discrete')[0]).toBeCloseTo(0.15625, 14);
		expect(inOne('discrete')[0]).toBeCloseTo(0.25, 14);
	});
});

describe('prediction', () => {
	it('trap: missed frames still predict with the time that has passed', () => {
		const missed = predict(predict(start, 0.4, 1), 0.4, 1);
		const once = predict(start, 0.8, 1);
		expect(missed.x).toBeCloseTo(0.8, 12);
		missed.covariance.forEach((value, k) => expect(value).toBeCloseTo(once.covariance[k]!, 12));
	});

	it('leaves the state it was given alone', () => {
		const before = start.covariance.slice();
		predict(start, 1, 1);
		update(start, 3, 3, noise);
		expect(start.covariance).toEqual(before);
	});
});

describe('update', () => {
	it('weighs prediction and measurement by their variances', () => {
		const { state, gain, nis, innovation } = update(start, 0.1, 0, noise);
		// One axis by hand: K = 0.04 / (0.04 + 0.01), P = (1 − K) 0.04.
		expect(gain[0]).toBeCloseTo(0.8, 12);
		expect(state.x).toBeCloseTo(0.08, 12);
		expect(state.covariance[0]).toBeCloseTo(0.008, 12);
		expect(innovation).toEqual([0.1, 0]);
		expect(nis).toBeCloseTo(0.01 / 0.05, 12);
	});

	it('trap: one outlier without a gate wrecks a track', () => {
		let state = start;
		for (let k = 1; k <= 10; k += 1) state = update(predict(state, 0.4, 0.4), 0.4 * k, 0, noise).state;
		const expected = predict(state, 0.4, 0.4);
		const { nis, state: wrecked } = update(expected, expected.x + 1.5, 0, noise);
		expect(nis).toBeGreaterThan(chiSquareGate(0.99, 2));
		// Followed blindly, the person would run.
		expect(wrecked.vx).toBeGreaterThan(2);
	});

	it('keeps the covariance symmetric and its variances positive, whatever is measured', () => {
		const measurement = fc.record({
			dt: fc.double({ min: 0, max: 3, noNaN: true }),
			x: fc.double({ min: -50, max: 50, noNaN: true }),
			y: fc.double({ min: -50, max: 50, noNaN: true }),
			sd: fc.double({ min: 0.0005, max: 2, noNaN: true })
		});
		fc.assert(
			fc.property(fc.array(measurement, { minLength: 1, maxLength: 30 }), (list) => {
				let state = start;
				for (const { dt, x, y, sd } of list) {
					state = update(predict(state, dt, 1), x, y, { xx: sd * sd, xy: 0, yy: sd * sd }).state;
				}
				const p = state.covariance;
				for (let i = 0; i < 4; i += 1) {
					expect(p[i * 5]).toBeGreaterThan(0);
					for (let j = 0; j < i; j += 1) expect(p[i * 4 + j]).toBeCloseTo(p[j * 4 + i]!, 9);
				}
			})
		);
	});
});
