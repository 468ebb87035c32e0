/**
 * A robot's clock against the server's, from one-way messages as they come in.
 *
 * Arrival − stamp is clock difference plus transit, and transit only ever adds, so the least of the last minute is the
 * best that can be known (METHODS section 9). A constant difference, however large, is normal. What is not: a message
 * far above the minimum was stored on the way (late); one far below it claims to be from the future, and is believed
 * only when others agree, because then the clock was set.
 */

export interface ClockRule {
	/** s a minimum counts; drift of 200 ppm is followed to 12 ms with 60 s */
	readonly window: number;
	/** s the fastest message is taken to be on its way; one-way stamps cannot tell it from offset */
	readonly leastTransit: number;
	/** s above the minimum from which a message is late */
	readonly lateAfter: number;
	/** s below the minimum from which a message is from the future */
	readonly futureAfter: number;
	/** s by which messages may differ and still agree that the clock was set */
	readonly agreeWithin: number;
	/** Messages in a row, and seconds they must span, before a clock is believed to have been set forward */
	readonly futureMessages: number;
	readonly futureFor: number;
	/** The same for a clock that was set back */
	readonly lateMessages: number;
	readonly lateFor: number;
	/** s/s a robot's clock may drift; widens `futureAfter` and `lateAfter` after a silence longer than the window */
	readonly drift: number;
}

/** All chosen by us; 200 ppm is common practice for a bad crystal, RFC 5905 tolerates 15 ppm. */
export const DEFAULT_CLOCK_RULE: ClockRule = {
	window: 60,
	leastTransit: 0,
	lateAfter: 2,
	futureAfter: 0.5,
	agreeWithin: 0.2,
	futureMessages: 5,
	futureFor: 1,
	lateMessages: 5,
	lateFor: 3,
	drift: 200e-6
};

/** Least arrival − stamp of the messages received from `at` on, until the next entry. */
interface Minimum {
	readonly at: number;
	readonly difference: number;
}

/** Messages in a row that agree with each other but not with the minimum. */
interface Streak {
	readonly kind: 'late' | 'future';
	readonly first: number;
	readonly least: number;
	readonly since: number;
	readonly count: number;
	/** Messages in a row that were held up even longer than these */
	readonly strays: number;
}

export interface ClockState {
	/** Oldest first, differences rising: an entry above a later one can never be the minimum again. Empty at the start. */
	readonly minima: readonly Minimum[];
	readonly streak: Streak | null;
	/** s, first message since the oldest of the minima expired; null while it has not */
	readonly expiring: number | null;
}

type ClockVerdict = 'ok' | 'late' | 'future' | 'stepped';

export interface ClockReading {
	readonly state: ClockState;
	readonly verdict: ClockVerdict;
	/** s, robot clock minus server clock: server time ≈ robot time − offset. (Two-way samples use the opposite sign.) */
	readonly offset: number;
	/** s, when the message was made by the server's clock; never after it was received */
	readonly correctedTime: number;
}

const BUCKETS = 64;
/** s of newer messages after which an expired minimum is let go */
const SETTLED = 10;
/** Disagreeing messages in a row after which a streak starts over. */
const STRAYS = 3;

export const startClock = (): ClockState => ({ minima: [], streak: null, expiring: null });

/**
 * Clock of a robot after one more message.
 *
 * The first message sets the offset, whatever it is. Numbers that are not finite change nothing and come back as late.
 * Feed live messages only: a retained message was made long before it arrives.
 *
 * @param robotTime s, the message's own stamp
 * @param receivedAt s, server clock; must not decrease between calls
 */
export function stepClock(
	state: ClockState,
	robotTime: number,
	receivedAt: number,
	rule: ClockRule = DEFAULT_CLOCK_RULE
): ClockReading {
	const difference = receivedAt - robotTime;
	if (!Number.isFinite(difference)) return readClock(state, 'late', receivedAt, receivedAt, rule);
	const begin = (least: number): ClockState => ({ ...startClock(), minima: [{ at: receivedAt, difference: least }] });
	if (state.minima.length === 0) return readClock(begin(difference), 'ok', robotTime, receivedAt, rule);

	const { minima, expiring } = withoutExpired(state, receivedAt, rule);
	const least = minima[0]!;
	const excess = difference - least.difference;
	const drifted = rule.drift * Math.max(0, receivedAt - least.at - rule.window);
	const kind = excess > rule.lateAfter + drifted ? 'late' : excess < -rule.futureAfter - drifted ? 'future' : null;
	if (kind === null) {
		const next = { minima: withMinimum(minima, receivedAt, difference, rule), streak: null, expiring };
		return readClock(next, 'ok', robotTime, receivedAt, rule);
	}
	const streak = continueStreak(state.streak, kind, difference, receivedAt, rule);
	return isConvincing(streak, receivedAt, rule)
		? readClock(begin(streak.least), 'stepped', robotTime, receivedAt, rule)
		: readClock({ minima, streak, expiring }, kind, robotTime, receivedAt, rule);
}

function readClock(
	state: ClockState,
	verdict: ClockVerdict,
	robotTime: number,
	receivedAt: number,
	{ leastTransit }: ClockRule
): ClockReading {
	const offset = leastTransit - (state.minima[0]?.difference ?? leastTransit);
	return { state, verdict, offset, correctedTime: Math.min(robotTime - offset, receivedAt) };
}

/**
 * What has expired goes, except the last of it until messages have come in for a while again: after a silence the first
 * to arrive may be a stored batch, and then the old minimum is still the better guess.
 */
function withoutExpired({ minima, expiring }: ClockState, at: number, { window }: ClockRule) {
	const fresh = minima.findIndex((entry) => entry.at >= at - window);
	if (fresh === 0) return { minima, expiring: null };
	const since = expiring ?? at;
	if (fresh > 0 && at - since >= SETTLED) return { minima: minima.slice(fresh), expiring: null };
	return { minima: minima.slice(fresh < 0 ? -1 : fresh - 1), expiring: since };
}

function withMinimum(minima: readonly Minimum[], at: number, difference: number, { window }: ClockRule): Minimum[] {
	const lower = minima.filter((entry) => entry.difference < difference);
	const last = lower.at(-1);
	// Within a bucket the first, lower entry speaks for this one too, which bounds the list.
	if (last && at - last.at < window / BUCKETS) return lower;
	return [...lower, { at, difference }];
}

/**
 * Agreement is measured from the first message of the streak. A batch stored during an outage comes in much faster than
 * it was made, its differences shrink from message to message, and so it never agrees with itself for long.
 */
function continueStreak(
	streak: Streak | null,
	kind: Streak['kind'],
	difference: number,
	at: number,
	{ agreeWithin }: ClockRule
): Streak {
	if (streak?.kind !== kind || difference < streak.first - agreeWithin) {
		return { kind, first: difference, least: difference, since: at, count: 1, strays: 0 };
	}
	if (difference > streak.first + agreeWithin) {
		// Held up even longer: says nothing either way, unless it is the streak that began with a stray.
		const strays = streak.strays + 1;
		if (strays < STRAYS) return { ...streak, strays };
		return { kind, first: difference, least: difference, since: at, count: 1, strays: 0 };
	}
	return { ...streak, least: Math.min(streak.least, difference), count: streak.count + 1, strays: 0 };
}

function isConvincing({ kind, count, since }: Streak, at: number, rule: ClockRule): boolean {
	const [messages, seconds] =
		kind === 'late' ? [rule.lateMessages, rule.lateFor] : [rule.futureMessages, rule.futureFor];
	return count >= messages && at - since >= seconds;
}
