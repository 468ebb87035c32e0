/** Weeks of a place: Monday 00:00 to Monday 00:00 by the clocks there, so 167 or 169 hours when the clocks change. */

import { Failure } from '../failure.ts';

export interface Week {
	/** s since the epoch, inclusive */
	readonly start: number;
	/** s since the epoch, exclusive */
	readonly end: number;
}

/**
 * The week that holds a moment, by local time (ISO 8601: weeks begin on Monday).
 *
 * @param time s since the epoch
 * @param timeZone IANA name, for example `Europe/London`
 * @throws Failure 'bad_input' when the time is not finite or the zone is not known
 */
export function weekOf(time: number, timeZone: string): Week {
	if (!Number.isFinite(time)) throw new Failure('bad_input', 'A week needs a moment.');
	const { year, month, day } = localDate(time, timeZone);
	// Days since Monday; 1970-01-05 was one.
	const weekday = ((((Date.UTC(year, month - 1, day) - MONDAY_MS) / DAY_MS) % 7) + 7) % 7;
	return {
		start: midnight(year, month, day - weekday, timeZone),
		end: midnight(year, month, day - weekday + 7, timeZone)
	};
}

const DAY_MS = 86_400_000;
const MONDAY_MS = 4 * DAY_MS;

function localDate(time: number, timeZone: string) {
	const parts = formatOf(timeZone).formatToParts(time * 1000);
	const number = (type: Intl.DateTimeFormatPartTypes) => Number(parts.find((part) => part.type === type)?.value);
	return {
		year: number('year'),
		month: number('month'),
		day: number('day'),
		seconds: number('hour') * 3600 + number('minute') * 60 + number('second')
	};
}

/** s since the epoch of 00:00 local; `day` may lie outside the month. Two rounds settle the zone's offset at that moment. */
function midnight(year: number, month: number, day: number, timeZone: string): number {
	const wanted = Date.UTC(year, month - 1, day) / 1000;
	let guess = wanted;
	for (let round = 0; round < 2; round++) {
		const local = localDate(guess, timeZone);
		const shown = Date.UTC(local.year, local.month - 1, local.day) / 1000 + local.seconds;
		guess += wanted - shown;
	}
	return guess;
}

function formatOf(timeZone: string): Intl.DateTimeFormat {
	try {
		return new Intl.DateTimeFormat('en-GB', {
			timeZone,
			hourCycle: 'h23',
			year: 'numeric',
			month: '2-digit',
			day: '2-digit',
			hour: '2-digit',
			minute: '2-digit',
			second: '2-digit'
		});
	} catch (cause) {
		throw new Failure('bad_input', `There is no time zone "${timeZone}".`, undefined, { cause });
	}
}
