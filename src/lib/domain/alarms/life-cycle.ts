/**
 * The life of one alarm, after the states of IEC 62682 / ISA-18.2 (list from memory). Pure: the caller brings the clock, applies
 * on-delay and off-delay before it says raise or clear, and stores what changed.
 *
 * Two things are kept apart: how the alarm stands (its state) and whether operators are kept from being called by it
 * (shelved, suppressed, out of service). A withheld alarm goes on living silently and calls afresh when it is let go.
 */

import { Failure } from '../failure.ts';

/** `returned`: the condition is gone, nobody has acknowledged it. */
export type AlarmState = 'unacknowledged' | 'acknowledged' | 'returned' | 'cleared';

/** In which list an alarm is shown: the strongest reason to withhold it, or in service. */
export type AlarmStanding = 'in_service' | 'shelved' | 'suppressed' | 'out_of_service';

/** Who withholds the alarm (a person, or the rule that suppresses by design), since when and why. */
export interface Withholding {
	readonly by: string;
	/** s */
	readonly since: number;
	readonly reason: string;
}

export interface Shelving extends Withholding {
	/** s; the shelf never lasts beyond this */
	readonly until: number;
	/** Ends as soon as the condition clears, if that is sooner */
	readonly oneShot: boolean;
}

/** Plain data: stored and read back, it goes on where it was. Times in s; null is "has not happened in this life". */
export interface AlarmCore {
	readonly state: AlarmState;
	/** Whether the condition holds, as last heard: true in the first two states, false in the last two */
	readonly active: boolean;
	/** Start of this life, which lasts until the alarm is cleared */
	readonly raisedAt: number | null;
	readonly returnedAt: number | null;
	readonly acknowledgedAt: number | null;
	readonly acknowledgedBy: string | null;
	readonly shelving: Shelving | null;
	/** By rule, oldest first; suppressed until every rule lets go */
	readonly suppressions: readonly Withholding[];
	readonly outOfService: Withholding | null;
}

/** An alarm that was never raised, and is in service. */
export const CLEARED_ALARM: AlarmCore = {
	state: 'cleared',
	active: false,
	raisedAt: null,
	returnedAt: null,
	acknowledgedAt: null,
	acknowledgedBy: null,
	shelving: null,
	suppressions: [],
	outOfService: null
};

export interface AlarmAct {
	readonly type:
		| 'raise'
		| 'clear'
		| 'acknowledge'
		| 'reannunciate'
		| 'shelve'
		| 'unshelve'
		| 'expire'
		| 'suppress'
		| 'unsuppress'
		| 'take_out'
		| 'put_back';
	/** s */
	readonly at: number;
	/** The person, or the rule that suppresses; wanted to acknowledge, shelve, (un)suppress and take out */
	readonly by?: string;
	/** Wanted to shelve, suppress and take out */
	readonly reason?: string;
	/** s, end of a shelf; wanted to shelve */
	readonly until?: number;
	/** The shelf ends as soon as the condition clears */
	readonly oneShot?: boolean;
}

/** One line of the alarm's record. A shelf that is prolonged is a change of standing from shelved to shelved. */
export type AlarmChange = {
	readonly act: AlarmAct['type'];
	/** s */
	readonly at: number;
	readonly by: string | null;
	readonly reason: string | null;
} & (
	| { readonly what: 'state'; readonly from: AlarmState; readonly to: AlarmState }
	| { readonly what: 'standing'; readonly from: AlarmStanding; readonly to: AlarmStanding }
);

export interface AlarmStep {
	readonly alarm: AlarmCore;
	/** Empty when the act does not apply; then `alarm` is the very object that came in */
	readonly changes: readonly AlarmChange[];
	/** Whether operators are called now */
	readonly annunciate: boolean;
}

/** s a shelf may last: one shift of 8 h (common practice); longer is refused, so that no shelf is endless. */
export const LONGEST_SHELVING = 8 * 3600;

/**
 * The alarm after one act. An act that does not apply (acknowledging twice, a shelf that is too long or has no reason,
 * an expiry before its time) changes nothing; the first acknowledgement keeps its who and when.
 *
 * @param longestShelving s
 * @throws Failure 'bad_input' when the time is not finite
 */
export function stepAlarm(alarm: AlarmCore, act: AlarmAct, longestShelving = LONGEST_SHELVING): AlarmStep {
	if (!Number.isFinite(act.at)) throw new Failure('bad_input', `An alarm act needs a time, not ${act.at}.`);
	const outcome = apply(alarm, act, longestShelving);
	if (outcome === null) return { alarm, changes: [], annunciate: false };
	return { ...outcome, changes: compare(alarm, outcome.alarm, act) };
}

function compare(before: AlarmCore, after: AlarmCore, act: AlarmAct): AlarmChange[] {
	const told = { act: act.type, at: act.at, by: act.by ?? null, reason: act.reason ?? null };
	const changes: AlarmChange[] = [];
	if (before.state !== after.state) changes.push({ what: 'state', from: before.state, to: after.state, ...told });
	const withheldAlike =
		before.shelving === after.shelving &&
		before.suppressions === after.suppressions &&
		before.outOfService === after.outOfService;
	if (!withheldAlike) changes.push({ what: 'standing', from: standingOf(before), to: standingOf(after), ...told });
	return changes;
}

type Outcome = Pick<AlarmStep, 'alarm' | 'annunciate'>;

const silently = (alarm: AlarmCore): Outcome => ({ alarm, annunciate: false });

/** Null when the act does not apply. */
function apply(alarm: AlarmCore, act: AlarmAct, longestShelving: number): Outcome | null {
	const { state, active, shelving, suppressions, outOfService } = alarm;
	const { at, by, reason, until = NaN, oneShot = false } = act;
	switch (act.type) {
		case 'raise':
			return active ? null : raise(alarm, at);
		case 'clear':
			return active ? clear(alarm, at) : null;
		case 'acknowledge': {
			if ((state !== 'unacknowledged' && state !== 'returned') || !by) return null;
			const next = state === 'returned' ? 'cleared' : 'acknowledged';
			return silently({ ...alarm, state: next, acknowledgedAt: at, acknowledgedBy: by });
		}
		case 'reannunciate':
			return state === 'acknowledged' && !isWithheld(alarm) ? call(alarm) : null;
		case 'shelve':
			if (!by || !reason?.trim() || !(until > at && until - at <= longestShelving)) return null;
			return silently({ ...alarm, shelving: { by, since: at, reason, until, oneShot } });
		case 'unshelve':
			return shelving ? letGo({ ...alarm, shelving: null }) : null;
		case 'expire':
			return shelving && at >= shelving.until ? letGo({ ...alarm, shelving: null }) : null;
		case 'suppress':
			if (!by || !reason?.trim() || suppressions.some((rule) => rule.by === by)) return null;
			return silently({ ...alarm, suppressions: [...suppressions, { by, since: at, reason }] });
		case 'unsuppress': {
			const others = suppressions.filter((rule) => rule.by !== by);
			return others.length < suppressions.length ? letGo({ ...alarm, suppressions: others }) : null;
		}
		case 'take_out':
			if (!by || !reason?.trim() || outOfService) return null;
			return silently({ ...alarm, outOfService: { by, since: at, reason } });
		case 'put_back':
			return outOfService ? letGo({ ...alarm, outOfService: null }) : null;
	}
}

function raise(alarm: AlarmCore, at: number): Outcome {
	// From `returned` the same life goes on, not acknowledged so far; from `cleared` a new one begins.
	const raisedAt = alarm.state === 'cleared' ? at : alarm.raisedAt;
	const raised: AlarmCore = { ...alarm, active: true, raisedAt, returnedAt: null };
	return isWithheld(alarm) ? silently(attended(raised)) : call(raised);
}

function clear(alarm: AlarmCore, at: number): Outcome {
	const next = alarm.state === 'acknowledged' ? 'cleared' : 'returned';
	const quiet: AlarmCore = { ...alarm, state: next, active: false, returnedAt: at };
	return quiet.shelving?.oneShot ? letGo({ ...quiet, shelving: null }) : silently(quiet);
}

/** Calls the operators, whatever was acknowledged before. */
const call = (alarm: AlarmCore): Outcome => ({ alarm: attended(alarm), annunciate: true });

const attended = (alarm: AlarmCore): AlarmCore => ({
	...alarm,
	state: 'unacknowledged',
	acknowledgedAt: null,
	acknowledgedBy: null
});

/** One reason to withhold the alarm is gone. With the last one gone it calls if its condition holds, else it is over. */
function letGo(alarm: AlarmCore): Outcome {
	if (isWithheld(alarm)) return silently(alarm);
	return alarm.active ? call(alarm) : silently({ ...alarm, state: 'cleared' });
}

/** Whether operators are kept from being called by this alarm. */
export const isWithheld = (alarm: AlarmCore): boolean => standingOf(alarm) !== 'in_service';

/** Out of service before suppressed before shelved. */
export function standingOf({ outOfService, suppressions, shelving }: AlarmCore): AlarmStanding {
	if (outOfService) return 'out_of_service';
	if (suppressions.length > 0) return 'suppressed';
	return shelving ? 'shelved' : 'in_service';
}
