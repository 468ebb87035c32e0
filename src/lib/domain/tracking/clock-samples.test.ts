import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { computeOneWayMinimum, driftError, filterClock, fitSkew, readTwoWaySample } from './clock-samples.ts';

describe('two-way samples (RFC 5905, section 8: θ and δ)', () => {
	it('reads the offset of a server 5 s ahead: positive means the server is ahead', () => {
		const sample = readTwoWaySample(100, 105.02, 105.03, 100.05);
		expect(sample.offset).toBeCloseTo(5, 9);
		expect(sample.delay).toBeCloseTo(0.04, 9);
		expect(sample.valid).toBe(true);
	});

	it('trap: asymmetric links bias the offset by half the difference, and the true one stays inside ± delay/2', () => {
		const { offset, low, high } = readTwoWaySample(100, 100.1, 100.11, 100.13);
		expect(offset).toBeCloseTo((0.1 - 0.02) / 2, 9);
		expect(low).toBeLessThanOrEqual(0);
		expect(high).toBeGreaterThanOrEqual(0);
	});

	it('does not count the time the server holds a message as delay', () => {
		expect(readTwoWaySample(0, 3600.004, 3600.104, 0.112).delay).toBeCloseTo(0.012, 9);
	});

	it('trap: a negative delay means a clock stepped between the stamps, and is refused', () => {
		expect(readTwoWaySample(100, 99.99, 100, 100.005).valid).toBe(false);
	});

	it('never misses the true offset by more than half the delay', () => {
		const leg = fc.double({ min: 0, max: 2, noNaN: true });
		fc.assert(
			fc.property(fc.double({ min: -100, max: 100, noNaN: true }), leg, leg, leg, (offset, there, held, back) => {
				const t2 = offset + there;
				const sample = readTwoWaySample(0, t2, t2 + held, there + held + back);
				expect(Math.abs(sample.offset - offset)).toBeLessThanOrEqual(sample.delay / 2 + 1e-9);
			})
		);
	});
});

describe('clock filter (RFC 5905, section 10: least delay of eight stages)', () => {
	const samples = [
		[5.012, 0.064],
		[5.001, 0.031],
		[4.998, 0.029],
		[5.04, 0.12],
		[5.003, 0.034],
		[5, 0.028],
		[5.15, 0.34],
		[5.006, 0.041]
	].map(([offset, delay], k) => ({ offset: offset!, delay: delay!, time: 16 * k }));

	it('trap: believes the sample with the least delay, not the average', () => {
		const clock = filterClock(samples)!;
		expect(clock.offset).toBe(5);
		expect(clock.mean).toBeCloseTo(5.02625, 9);
	});

	it('looks at the last eight only, and takes the newer of equals', () => {
		const old = { offset: 4.9, delay: 0.001, time: -16 };
		expect(filterClock([old, ...samples])!.offset).toBe(5);
		const twins = [0, 16].map((time) => ({ offset: 1 + time / 80, delay: 0.03, time }));
		expect(filterClock(twins)!.offset).toBe(1.2);
	});

	it('lets the distance grow by 15 µs a second (RFC 5905: frequency tolerance 15 ppm)', () => {
		const aged = filterClock([
			{ offset: 0, delay: 0.02, time: 0 },
			{ offset: 0, delay: 0.5, time: 1000 }
		])!;
		expect(aged.distance).toBeCloseTo(0.01 + 0.015 + 1e-6, 9);
	});

	it('has nothing to say without samples', () => {
		expect(filterClock([])).toBeNull();
	});
});

describe('one-way messages', () => {
	it('trap: cannot tell offset from transit', () => {
		const stamps = [0, 1, 2];
		const farClock = computeOneWayMinimum(stamps, [2.0, 3.1, 4.3])!;
		const slowLink = computeOneWayMinimum(
			stamps.map((t) => t + 1.5),
			[2.0, 3.1, 4.3]
		)!;
		expect(farClock.minimum).toBe(2);
		expect(slowLink.minimum).toBe(0.5);
		expect(slowLink.excess).toEqual(farClock.excess.map((value) => expect.closeTo(value, 12)));
	});

	it('takes the first of equal minima, and nothing from no messages', () => {
		expect(computeOneWayMinimum([0, 1], [1, 2])!.index).toBe(0);
		expect(computeOneWayMinimum([], [])).toBeNull();
	});
});

describe('drift', () => {
	it('trap: 15 ppm is 54 ms an hour and 1.3 s a day (RFC 5905 frequency tolerance)', () => {
		expect(driftError(15, 3600)).toBeCloseTo(0.054, 12);
		expect(driftError(15, 86400)).toBeCloseTo(1.296, 12);
	});

	it('is found under any delays (Moon, Skelly & Towsley 1999, from memory)', () => {
		const delays = fc.array(fc.double({ min: 0.001, max: 3, noNaN: true }), { minLength: 10, maxLength: 40 });
		fc.assert(
			fc.property(delays, fc.integer({ min: -500, max: 500 }), (held, ppm) => {
				const stamps = held.map((_, k) => 10 * k);
				// Two messages in each half come through at once, so the line under all points is the clock itself.
				const fast = new Set([1, 2, held.length - 2, held.length - 3]);
				const arrivals = stamps.map((t, k) => t * (1 + ppm * 1e-6) + 0.3 + (fast.has(k) ? 0 : held[k]!));
				const line = fitSkew(stamps, arrivals)!;
				expect(line.skew * 1e6).toBeCloseTo(ppm, 3);
				expect(line.intercept).toBeCloseTo(0.3, 6);
			})
		);
	});

	it('rests on two messages and lies under all', () => {
		const stamps = [0, 10, 20, 30, 40];
		const line = fitSkew(stamps, [0.5, 10.2, 20.4, 30.3, 40.9])!;
		expect(line.support).toEqual([1, 3]);
		expect(line.cost).toBeCloseTo(0.5 - 0.15 + 0 + (0.4 - 0.25) + 0 + (0.9 - 0.35), 9);
	});

	it('is unknown before two messages of different times', () => {
		expect(fitSkew([5], [6])).toBeNull();
		expect(fitSkew([5, 5], [6, 7])).toBeNull();
	});
});
