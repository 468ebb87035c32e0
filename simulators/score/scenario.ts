/** The day the scoreboard runs: real pace, lively from the start, with everything that goes wrong or with nothing. */

import { DAY } from '../crowd/timetable.ts';
import { NO_FAULTS } from '../robots/faults.ts';
import { scenarioOf, type Scenario } from '../scenarios.ts';
import { CLEAN_LINK } from '../transport/link.ts';

export type FaultChoice = 'all' | 'none';

export const isFaultChoice = (word: string): word is FaultChoice => word === 'all' || word === 'none';

/** Persons in both floors together when every place of the demo is full. */
const FULL_HOUSE = scenarioOf('day').peak.reduce((sum, peak) => sum + peak, 0);

/**
 * Faults per robot-hour of driving, more than a real fleet has, so that an hour holds some of each. The link loses 1 %,
 * clocks are seconds apart and drift as cheap ones do.
 */
const EVERYTHING: Pick<Scenario, 'faults' | 'link' | 'rubbish'> = {
	faults: {
		onlookers: 0.6,
		obstruction: 0.4,
		localization: 0.15,
		estop: 0.15,
		breakdown: 0.15,
		manual: 0.15,
		silence: 0.3,
		restart: 0.2
	},
	link: { clockOffset: 2, clockDrift: 20, delay: 0.01, jitter: 0.03, loss: 0.01, duplicate: 0.002, reorder: 0.002 },
	rubbish: 0.001
};

/** Robots know exactly where they are and who stands where; only people get in their way. */
const NOTHING: Pick<Scenario, 'faults' | 'link' | 'rubbish' | 'sensor' | 'poseError'> = {
	faults: NO_FAULTS,
	link: CLEAN_LINK,
	rubbish: 0,
	sensor: { noise: 0.01, velocityNoise: 0.02, dropout: 0, idSwitch: 0, ghosts: 0, peopleHide: false },
	poseError: 0
};

/**
 * @param people most persons in the venue, both floors together; null for as many as in the demo
 */
export function scoreScenario(faults: FaultChoice, people: number | null): Scenario {
	const day = scenarioOf('day');
	const share = people === null ? 1 : people / FULL_HOUSE;
	return {
		...day,
		...(faults === 'all' ? EVERYTHING : NOTHING),
		peak: day.peak.map((peak) => Math.round(peak * share)),
		timetable: { phases: DAY, compression: 1, from: 'session-change' },
		firstOnlookersAt: null
	};
}
