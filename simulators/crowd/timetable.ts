/** What a day at the venue asks of people: how many are in, and where they want to be. */

import type { PlaceKind } from '../venue/model.ts';

export type Wish = PlaceKind | 'food' | 'cloakroom' | 'leave';

export interface Phase {
	readonly key: string;
	/** s of a real day; a compressed timetable divides it */
	readonly seconds: number;
	/** Share of the peak number of people the venue draws toward, 0…1 */
	readonly fill: number;
	/** Relative wish to go to each kind of place */
	readonly wishes: Readonly<Partial<Record<Wish, number>>>;
}

/** Ten hours, invented: doors, sessions, lunch, a concert and its let-out. */
export const DAY: readonly Phase[] = [
	{
		key: 'doors-open',
		seconds: 3600,
		fill: 0.7,
		wishes: { cloakroom: 3, lounge: 3, stand: 4, audience: 1, lift: 0.6, food: 0.5 }
	},
	{
		key: 'morning',
		seconds: 6000,
		fill: 0.8,
		wishes: { stand: 6, audience: 4, lounge: 1, lift: 0.4, food: 0.3, leave: 0.1 }
	},
	{
		key: 'session-change',
		seconds: 2700,
		fill: 0.9,
		wishes: { stand: 4, lounge: 3, food: 2, lift: 1, audience: 1, leave: 0.2 }
	},
	{
		key: 'lunch',
		seconds: 5400,
		fill: 0.95,
		wishes: { food: 4, table: 5, stand: 3, lounge: 2, lift: 0.5, leave: 0.3 }
	},
	{
		key: 'afternoon',
		seconds: 7200,
		fill: 0.75,
		wishes: { stand: 5, audience: 3, lounge: 1.5, food: 0.5, leave: 0.4 }
	},
	{ key: 'concert', seconds: 6600, fill: 1, wishes: { audience: 10, lounge: 1.5, stand: 1, food: 0.6, lift: 0.2 } },
	{ key: 'let-out', seconds: 1800, fill: 0.15, wishes: { leave: 6, cloakroom: 3, lounge: 0.5 } },
	{ key: 'quiet', seconds: 2700, fill: 0.12, wishes: { stand: 2, lounge: 2, leave: 0.5 } }
];

export interface Timetable {
	readonly phases: readonly Phase[];
	/** How many times faster than the real day the phases follow each other; people walk at their usual speed. */
	readonly compression: number;
	/** Key of the phase the clock starts in. */
	readonly from: string;
}

export interface PhaseNow {
	readonly phase: Phase;
	/** s until the next phase */
	readonly left: number;
}

/** The phase at `time` seconds after the start; the timetable repeats for ever. */
export function phaseAt(timetable: Timetable, time: number): PhaseNow {
	const { phases, compression } = timetable;
	const first = Math.max(
		0,
		phases.findIndex(({ key }) => key === timetable.from)
	);
	const total = phases.reduce((sum, { seconds }) => sum + seconds, 0);
	let rest = (time * compression) % total;
	for (let i = 0; ; i = (i + 1) % phases.length) {
		const phase = phases[(first + i) % phases.length]!;
		if (rest < phase.seconds) return { phase, left: (phase.seconds - rest) / compression };
		rest -= phase.seconds;
	}
}
