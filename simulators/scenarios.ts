/** Named situations the fleet can be put in. Everything that may go wrong is a setting here. */

import { DAY, type Timetable } from './crowd/timetable.ts';
import { NO_FAULTS, type FaultRates } from './robots/faults.ts';
import type { SensorSettings } from './robots/sensor.ts';
import { MILD_LINK, type LinkSettings } from './transport/link.ts';

export const SCENARIO_NAMES = [
	'day',
	'quiet-morning',
	'doors-open',
	'let-out',
	'lift-out',
	'wifi-hole',
	'bad-clock',
	'rubbish',
	'stuck'
] as const;
export type ScenarioName = (typeof SCENARIO_NAMES)[number];

export interface Scenario {
	readonly timetable: Timetable;
	/** Most people on each floor. */
	readonly peak: readonly number[];
	/** Share of people who make way for a robot, 0…1. */
	readonly yielding: number;
	readonly children: number;
	/** Chance per second that somebody near a moving robot stops to look. */
	readonly curiosity: number;
	readonly faults: FaultRates;
	/** s after the start; the onlookers that make sure a demo shows a halt early. Null for none. */
	readonly firstOnlookersAt: number | null;
	readonly link: LinkSettings;
	readonly sensor: Omit<SensorSettings, 'range' | 'fieldOfView'>;
	/** Standard deviation of the slowly wandering error of a robot's own place, m. */
	readonly poseError: number;
	readonly poseHz: number;
	readonly peopleHz: number;
	/** Lifts stand still between these times, s. */
	readonly liftOut: readonly [from: number, to: number] | null;
	/** A part of one floor without radio. */
	readonly radioHole: {
		readonly floor: number;
		readonly x: number;
		readonly y: number;
		readonly radius: number;
	} | null;
	/** Share of messages replaced by rubbish. */
	readonly rubbish: number;
	/** One robot is sent into standing people who close round it. */
	readonly stuck: boolean;
}

const SENSOR = { noise: 0.04, velocityNoise: 0.1, dropout: 0.05, idSwitch: 0.005, ghosts: 1, peopleHide: false };

const demo: Scenario = {
	timetable: { phases: DAY, compression: 15, from: 'doors-open' },
	peak: [340, 90],
	yielding: 0.7,
	children: 0.06,
	curiosity: 0.001,
	faults: {
		...NO_FAULTS,
		onlookers: 0.25,
		obstruction: 0.12,
		localization: 0.06,
		estop: 0.06,
		breakdown: 0.04,
		manual: 0.05,
		silence: 0.08,
		restart: 0.05
	},
	firstOnlookersAt: 45,
	link: MILD_LINK,
	sensor: SENSOR,
	poseError: 0.04,
	poseHz: 5,
	peopleHz: 5,
	liftOut: null,
	radioHole: null,
	rubbish: 0,
	stuck: false
};

const from = (key: string): Timetable => ({ ...demo.timetable, from: key });

const SCENARIOS: Record<ScenarioName, Scenario> = {
	day: demo,
	'quiet-morning': {
		...demo,
		timetable: { ...demo.timetable, compression: 1, from: 'quiet' },
		faults: NO_FAULTS,
		firstOnlookersAt: null
	},
	'doors-open': { ...demo, peak: [520, 120] },
	'let-out': { ...demo, peak: [560, 120], timetable: { phases: DAY, compression: 15, from: 'let-out' } },
	'lift-out': { ...demo, timetable: from('session-change'), liftOut: [20, 420] },
	'wifi-hole': { ...demo, timetable: from('morning'), radioHole: { floor: 0, x: 20, y: 52, radius: 14 } },
	'bad-clock': {
		...demo,
		timetable: from('morning'),
		link: { ...MILD_LINK, clockOffset: 90, clockDrift: 200, delay: 0.03, jitter: 0.08 }
	},
	rubbish: {
		...demo,
		timetable: from('morning'),
		link: { ...MILD_LINK, loss: 0.05, duplicate: 0.05, reorder: 0.05 },
		rubbish: 0.03
	},
	stuck: {
		...demo,
		timetable: from('quiet'),
		peak: [90, 20],
		curiosity: 0,
		faults: NO_FAULTS,
		firstOnlookersAt: null,
		stuck: true
	}
};

export const scenarioOf = (name: ScenarioName): Scenario => SCENARIOS[name];

export const isScenarioName = (name: string): name is ScenarioName =>
	(SCENARIO_NAMES as readonly string[]).includes(name);

/** Sensor of a robot model by its letter: how far and how wide it looks. */
export function viewOf(letter: string): Pick<SensorSettings, 'range' | 'fieldOfView'> {
	if (letter === 'G') return { range: 10, fieldOfView: null };
	if (letter === 'S') return { range: 6, fieldOfView: (200 * Math.PI) / 180 };
	return { range: 8, fieldOfView: (270 * Math.PI) / 180 };
}
