/** What a screen reader is told about new alarms: one sentence for all that came since the last, so that a flood is not read out. */

import type { LiveAlarm } from '../../contracts/live.ts';
import { counted } from '../ui/format.ts';

export interface Announcement {
	readonly words: string;
	/** Interrupts what is being read: something of high priority is new. */
	readonly urgent: boolean;
}

/** @param fresh alarms that came since the last announcement; none give none */
export function announceAlarms(fresh: readonly LiveAlarm[]): Announcement | null {
	const first = fresh[0];
	if (!first) return null;
	const high = fresh.filter(({ priority }) => priority === 'high').length;
	if (fresh.length === 1)
		return {
			words: `New ${first.priority} alarm. ${first.place}: ${[...first.robots, first.what].join(' ')}. ${first.action}`,
			urgent: high > 0
		};
	return { words: `${counted(fresh.length, 'new alarm')}${high ? `, ${high} high` : ''}.`, urgent: high > 0 };
}
