import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	flowFromPerMinuteFoot,
	levelOfDensity,
	levelOfFlow,
	levelOfSpace,
	NO_LEVEL,
	SCHEME_NAMES,
	squareMetresFromFeet,
	stepLevel,
	type LevelState
} from './level-of-service.ts';

const inFeet = (scheme: Parameters<typeof levelOfSpace>[0], spaces: readonly number[]) =>
	spaces.map((space) => levelOfSpace(scheme, squareMetresFromFeet(space))).join('');

describe('published ladders', () => {
	// Fruin 1971, HRR 355: A 35 ft²/p or greater, 25–35, 15–25, 10–15, 5–10, F 5 or less (wording from memory).
	it('Fruin, walkway: 35, 25, 15, 10, 5 ft²/p', () => {
		expect(inFeet('fruin_walkway', [36, 30, 20, 12, 7, 4])).toBe('ABCDEF');
		expect(inFeet('fruin_walkway', [35, 25, 15, 10, 5])).toBe('ABCDF');
	});

	// Fruin 1971, Pedestrian Planning and Design, queues (from memory).
	it('Fruin, queue: 13, 10, 7, 3, 2 ft²/p', () => {
		expect(inFeet('fruin_queueing', [14, 11, 8, 5, 2.5, 1])).toBe('ABCDEF');
	});

	// TRB, HCM 2010/2016: > 60, > 40–60, > 24–40, > 15–24, > 8–15, ≤ 8 ft²/p (D–F from memory).
	it('HCM, walkway: > 60, 40, 24, 15, 8 ft²/p', () => {
		expect(inFeet('hcm2010_walkway_average', [61, 50, 30, 20, 10, 8])).toBe('ABCDEF');
		expect(inFeet('hcm2010_walkway_average', [60, 40, 24, 15, 8])).toBe('BCDEF');
	});

	// TRB, HCM 2010, platoons: > 530, 90, 40, 23, 11 ft²/p; HCM 2000, queues: > 1.2, 0.9, 0.6, 0.3, 0.2 m²/p (from memory).
	it('HCM, platoons and queue', () => {
		expect(inFeet('hcm2010_walkway_platoon', [531, 100, 50, 30, 12, 11])).toBe('ABCDEF');
		expect([1.3, 1.2, 0.9, 0.6, 0.3, 0.2].map((space) => levelOfSpace('hcm2000_queueing', space)).join('')).toBe(
			'ABCDEF'
		);
	});

	// Same sources; persons per minute and foot.
	it('flow: Fruin 7, 10, 15, 20, 25 and HCM 5, 7, 10, 15, 23, bounds included', () => {
		const levels = (scheme: 'fruin_walkway' | 'hcm2010_walkway_average', flows: number[]) =>
			flows.map((flow) => levelOfFlow(scheme, flowFromPerMinuteFoot(flow))).join('');
		expect(levels('fruin_walkway', [0, 7, 10, 15, 20, 25, 25.1])).toBe('AABCDEF');
		expect(levels('hcm2010_walkway_average', [5, 7, 10, 15, 23, 23.1])).toBe('ABCDEF');
	});
});

describe('what naive code gets wrong', () => {
	it('the handbooks disagree: 0.3 persons/m² is A, C or D', () => {
		expect(levelOfDensity('fruin_walkway', 0.3)).toBe('A');
		expect(levelOfDensity('hcm2010_walkway_average', 0.3)).toBe('C');
		expect(levelOfDensity('hcm2010_walkway_platoon', 0.3)).toBe('D');
	});

	it('a value on a bound stays there through square metres and 1/density', () => {
		[35, 25, 15, 10].forEach((feet, k) => {
			expect(levelOfDensity('fruin_walkway', 1 / squareMetresFromFeet(feet))).toBe('ABCD'[k]);
			expect(levelOfDensity('hcm2010_walkway_average', 1 / squareMetresFromFeet([60, 40, 24, 15][k]!))).toBe('BCDE'[k]);
		});
	});

	it('3.24 m² is not 35 ft²', () => {
		expect(squareMetresFromFeet(35)).toBeCloseTo(3.2516, 4);
		expect(levelOfSpace('fruin_walkway', 3.24)).toBe('B');
	});

	it('a waiting crowd judged by the walkway table is F, by the queue table it is not', () => {
		expect(levelOfDensity('fruin_walkway', 2.5)).toBe('F');
		expect(levelOfDensity('fruin_queueing', 2.5)).toBe('D');
	});

	it('queue tables have no flow ladder', () => {
		expect(levelOfFlow('fruin_queueing', 0.1)).toBeNull();
	});

	it('not measured has no letter; empty and observed is A', () => {
		for (const scheme of SCHEME_NAMES) {
			expect(levelOfDensity(scheme, null)).toBeNull();
			expect(levelOfDensity(scheme, NaN)).toBeNull();
			expect(levelOfDensity(scheme, -1)).toBeNull();
			expect(levelOfDensity(scheme, 0)).toBe('A');
			expect(levelOfDensity(scheme, Infinity)).toBe('F');
		}
	});
});

it('never gets better as density grows', () => {
	const density = fc.double({ min: 0, max: 10, noNaN: true });
	fc.assert(
		fc.property(fc.constantFrom(...SCHEME_NAMES), density, density, (scheme, a, b) => {
			expect(levelOfDensity(scheme, Math.min(a, b))! <= levelOfDensity(scheme, Math.max(a, b))!).toBe(true);
		})
	);
});

describe('letter with hysteresis (0.431 persons/m² parts B from C)', () => {
	const rule = { margin: 0.1, dwell: 10 };
	/** Feeds [seconds, persons/m²] and returns the letters, one per sample. */
	const run = (samples: [number, number | null][]) => {
		let state: LevelState = NO_LEVEL;
		return samples.map(([now, density]) => {
			state = stepLevel(state, 'fruin_walkway', density, now, rule);
			return state.level;
		});
	};

	it('takes the first measurement at once', () => {
		expect(run([[0, 0.5]])).toEqual(['C']);
	});

	it('does not flicker within the margin', () => {
		expect(
			run([
				[0, 0.42],
				[20, 0.45],
				[40, 0.42],
				[60, 0.46]
			])
		).toEqual(['B', 'B', 'B', 'B']);
	});

	it('changes once the density has stayed beyond for the dwell time', () => {
		expect(
			run([
				[0, 0.4],
				[1, 0.6],
				[10.9, 0.6],
				[11, 0.6]
			])
		).toEqual(['B', 'B', 'B', 'C']);
		expect(
			run([
				[0, 0.6],
				[1, 0.3],
				[11, 0.3]
			])
		).toEqual(['C', 'C', 'A']);
	});

	it('starts the dwell time again after coming back', () => {
		expect(
			run([
				[0, 0.4],
				[1, 0.6],
				[6, 0.4],
				[7, 0.6],
				[12, 0.6],
				[17, 0.6]
			])
		).toEqual(['B', 'B', 'B', 'B', 'B', 'C']);
	});

	it('has no letter while nothing is measured', () => {
		expect(
			run([
				[0, 0.4],
				[1, null],
				[2, 0.9]
			])
		).toEqual(['B', null, 'D']);
	});
});
