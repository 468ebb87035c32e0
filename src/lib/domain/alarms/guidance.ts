/** What an alarm about a halted robot says and asks for. No action, no alarm: every line here tells somebody what to do. */

import type { HaltKind } from '../halts/halt-detector.ts';
import type { Verdict } from '../room/room.ts';

export type Priority = 'high' | 'medium' | 'low';

export interface Guidance {
	readonly priority: Priority;
	/** What happened, in words that go after the marks of one robot or several; without the place */
	readonly what: string;
	/** What the operator does now */
	readonly action: string;
}

/**
 * Wording and priority for a halt. Priorities are chosen by us by time to respond: a fault needs a person at the robot,
 * a dither resolves itself more often than not.
 */
export function guidanceFor(kind: HaltKind, verdict: Verdict): Guidance {
	switch (kind) {
		case 'fault':
			return {
				priority: 'high',
				what: 'fault reported, standing',
				action: 'Send someone to the robot. Read its errors before anything else.'
			};
		case 'silent':
			return {
				priority: 'medium',
				what: 'silent, nothing heard from it',
				action: 'Send someone to the last place. Check the radio coverage there.'
			};
		case 'dither':
			return {
				priority: 'low',
				what: 'driving without getting on',
				action: 'Watch it. Ask it to pause and send someone if it is in people’s way.'
			};
		case 'stall':
			return {
				priority: 'medium',
				what: 'standing with nobody in the way',
				action: 'Send someone to see what holds it.'
			};
		case 'freeze':
			return { priority: 'medium', ...FREEZE[verdict] };
	}
}

const FREEZE: Readonly<Record<Verdict, Omit<Guidance, 'priority'>>> = {
	packed: { what: 'stuck in a packed crowd', action: 'Send someone to open a way. No robot could go on here now.' },
	shared: { what: 'waiting for people to make way', action: 'Send someone to ask people to let it pass.' },
	open: { what: 'standing although there is room', action: 'Send someone to look at the robot.' },
	unseen: {
		what: 'stuck among people',
		action: 'Send someone to look: too little of the floor is seen to say more.'
	}
};

const RANK: Readonly<Record<Priority, number>> = { high: 2, medium: 1, low: 0 };

/** The more urgent of two priorities. */
export const worse = (a: Priority, b: Priority): Priority => (RANK[b] > RANK[a] ? b : a);
