import { describe, expect, it } from 'vitest';
import { meanIndividualDensities, personMeanDensity, shareOfTimeAt, timeMeanDensity } from './averaging.ts';
import { levelOfDensity } from './level-of-service.ts';

const samples = [
	{ density: 0.1, duration: 100 },
	{ density: 2.5, duration: 20 }
];

describe('what naive code gets wrong', () => {
	it('the level of the mean is not what people met: C by time, E by person, F for a sixth of the time', () => {
		expect(timeMeanDensity(samples)).toBeCloseTo(0.5, 12);
		expect(personMeanDensity(samples)).toBeCloseTo(2.1, 12);
		expect(levelOfDensity('fruin_walkway', timeMeanDensity(samples))).toBe('C');
		expect(levelOfDensity('fruin_walkway', personMeanDensity(samples))).toBe('E');
		expect(shareOfTimeAt('F', 'fruin_walkway', samples)).toBeCloseTo(1 / 6, 12);
	});

	it('the mean over persons is not the mean over area', () => {
		const means = meanIndividualDensities([0.2, 0.2, 3, 3, 3])!;
		expect(means.arithmetic).toBeCloseTo(1.88, 12);
		expect(means.harmonic).toBeCloseTo(5 / 11, 12);
	});
});

it('is not defined without time, without persons or without densities', () => {
	expect(timeMeanDensity([])).toBeNull();
	expect(shareOfTimeAt('A', 'fruin_walkway', [])).toBeNull();
	expect(personMeanDensity([{ density: 0, duration: 60 }])).toBeNull();
	expect(meanIndividualDensities([])).toBeNull();
});
