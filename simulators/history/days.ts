/** When the invented venue was open, and how full its zones were minute by minute. */

import type { Random } from '../core/random.ts';

export interface OpenDay {
	/** ms since the epoch of the first minute the doors were open; whole minutes */
	readonly opensMs: number;
	/** Share of an ordinary day's visitors */
	readonly busyness: number;
	/** Whole weeks since the start of the history */
	readonly week: number;
}

export const OPEN_MINUTES = 8 * 60;
const DAY_MS = 86_400_000;
const OPENS_AT_HOUR = 10;

/**
 * Days of the `weeks` whole weeks before the week of `nowMs`, Monday to Saturday, open 10:00–18:00 venue time.
 * The last weeks are busier, so that a comparison of raw counts would mislead.
 */
export function openDays(nowMs: number, weeks: number, timeZone: string, random: Random): OpenDay[] {
	const today = Math.floor(nowMs / DAY_MS) * DAY_MS;
	const weekday = (new Date(today).getUTCDay() + 6) % 7;
	const firstMonday = today - (weekday + 7 * weeks) * DAY_MS;
	const days: OpenDay[] = [];
	for (let week = 0; week < weeks; week++) {
		for (let day = 0; day < 6; day++) {
			const date = firstMonday + (7 * week + day) * DAY_MS;
			const weekend = day === 5 ? 1.35 : 1;
			const busyness = (0.8 + 0.05 * week) * weekend * Math.exp(random.normal(0, 0.15));
			days.push({ opensMs: localHour(date, OPENS_AT_HOUR, timeZone), busyness, week });
		}
	}
	return days;
}

/** ms since the epoch at which clocks of the zone show `hour` on the given UTC date. */
function localHour(dateMs: number, hour: number, timeZone: string): number {
	const guess = dateMs + hour * 3_600_000;
	const shown = Number(
		new Intl.DateTimeFormat('en-GB', { timeZone, hour: 'numeric', hourCycle: 'h23' }).format(new Date(guess))
	);
	return guess - (shown - hour) * 3_600_000;
}

/** Mean density of a zone on an ordinary day at its fullest, persons/m²; zones not named get `OTHER`. Invented. */
const FULLEST: Readonly<Record<string, number>> = {
	entrance: 0.35,
	'foyer-west': 0.22,
	'foyer-lifts': 0.4,
	'foyer-east': 0.2,
	cloakroom: 0.5,
	'hall-a': 0.35,
	'hall-b-rear': 0.3,
	'hall-b-stage': 0.9,
	'hall-c': 0.3,
	'food-court': 0.7,
	'loading-west': 0.02,
	'loading-east': 0.02,
	'lift-lobby': 0.45,
	'bridge-west': 0.25,
	'bridge-pinch': 0.8,
	'bridge-east': 0.25
};
const OTHER = 0.2;

/** Peaks of the day as minutes after opening: arrivals, session changes, lunch, let-out. Zone key → (minute, width, height). */
function shapeAt(zone: string, minute: number): number {
	const bump = (at: number, width: number) => Math.exp(-(((minute - at) / width) ** 2));
	const base = 0.25 + 0.35 * bump(240, 170);
	if (zone === 'food-court') return 0.15 + 0.85 * bump(165, 45) + 0.2 * bump(300, 40);
	if (zone === 'cloakroom' || zone === 'entrance') return 0.1 + 0.9 * bump(20, 30) + 0.8 * bump(465, 25);
	if (zone === 'hall-b-stage') return 0.15 + 0.6 * bump(75, 40) + 0.85 * bump(400, 55);
	if (zone.startsWith('bridge') || zone.includes('lift'))
		return 0.2 + 0.7 * bump(120, 20) + 0.6 * bump(210, 20) + 0.8 * bump(455, 20);
	return base + 0.25 * bump(100, 50);
}

/** Minute means of one zone on one day, persons/m²: shape × level × a slowly wandering factor. */
export function zoneMinutes(zone: string, day: OpenDay, random: Random): Float64Array {
	const minutes = new Float64Array(OPEN_MINUTES);
	const level = (FULLEST[zone] ?? OTHER) * day.busyness;
	let wander = random.normal(0, 0.3);
	for (let m = 0; m < OPEN_MINUTES; m++) {
		wander = 0.95 * wander + random.normal(0, 0.09);
		minutes[m] = level * shapeAt(zone, m) * Math.exp(wander);
	}
	return minutes;
}
