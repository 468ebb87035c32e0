/** Clock offset and drift from samples: what two-way and one-way time stamps can say, and what they cannot. */

export interface TwoWaySample {
	/** s; positive when the server's clock is ahead: server time = robot time + offset */
	readonly offset: number;
	/** s on the way there and back, without the time the server held the message */
	readonly delay: number;
	/** s; the true offset lies between these, whatever the two legs are: offset ± delay/2 */
	readonly low: number;
	readonly high: number;
	/** False when the delay is negative: a clock stepped between the stamps and the sample says nothing */
	readonly valid: boolean;
}

/**
 * One exchange of time stamps (RFC 5905): θ = ((T2 − T1) + (T3 − T4))/2, δ = (T4 − T1) − (T3 − T2).
 *
 * Unequal legs bias θ by half their difference, and no averaging takes that away.
 *
 * @param t1 robot sends, robot clock @param t2 server receives @param t3 server sends @param t4 robot receives
 */
export function readTwoWaySample(t1: number, t2: number, t3: number, t4: number): TwoWaySample {
	const offset = (t2 - t1 + (t3 - t4)) / 2;
	const delay = t4 - t1 - (t3 - t2);
	return { offset, delay, low: offset - delay / 2, high: offset + delay / 2, valid: delay >= 0 };
}

export interface FilterSample {
	/** s */
	readonly offset: number;
	readonly delay: number;
	/** s, when it was measured */
	readonly time: number;
}

export interface FilteredClock {
	/** Index of the chosen sample among the last eight */
	readonly chosen: number;
	readonly offset: number;
	readonly delay: number;
	/** s; precision and age of the samples, halved from one to the next by delay */
	readonly dispersion: number;
	/** s; root mean square of the differences from the chosen offset */
	readonly jitter: number;
	/** s; the same sum as the RFC's text prints it, 1/(n − 1) outside the root. Kept for comparison; use `jitter`. */
	readonly jitterAsPrinted: number;
	/** s; the most the chosen offset can be wrong by now: δ/2 + dispersion of that sample */
	readonly distance: number;
	readonly mean: number;
	readonly median: number;
}

/** RFC 5905: frequency tolerance, s/s. A clock within it loses 54 ms an hour. */
const FREQUENCY_TOLERANCE = 15e-6;
/** s; assumed reading precision of a clock. */
const PRECISION = 1e-6;
/** RFC 5905: stages of the clock filter. */
const STAGES = 8;

/**
 * Clock filter of RFC 5905: of the last eight samples (oldest first) the one with the least delay is believed, the
 * newer one of equals, because queues only ever add delay; an average would be pulled up by them. Null without samples.
 */
export function filterClock(samples: readonly FilterSample[]): FilteredClock | null {
	const last = samples.slice(-STAGES);
	const newest = last.at(-1);
	if (!newest) return null;
	const byDelay = last.map((sample, index) => ({ sample, index }));
	byDelay.sort((a, b) => a.sample.delay - b.sample.delay || b.sample.time - a.sample.time);
	const { sample: best, index } = byDelay[0]!;
	const ageing = ({ time }: FilterSample) => PRECISION + FREQUENCY_TOLERANCE * (newest.time - time);
	const squares = last.reduce((sum, { offset }) => sum + (offset - best.offset) ** 2, 0);
	const others = last.length - 1;
	const offsets = last.map(({ offset }) => offset).sort((a, b) => a - b);
	const half = last.length >> 1;
	return {
		chosen: index,
		offset: best.offset,
		delay: best.delay,
		dispersion: byDelay.reduce((sum, { sample }, rank) => sum + ageing(sample) / 2 ** (rank + 1), 0),
		jitter: others > 0 ? Math.sqrt(squares / others) : 0,
		jitterAsPrinted: others > 0 ? Math.sqrt(squares) / others : 0,
		distance: best.delay / 2 + ageing(best),
		mean: offsets.reduce((sum, offset) => sum + offset, 0) / last.length,
		median: last.length % 2 === 1 ? offsets[half]! : (offsets[half - 1]! + offsets[half]!) / 2
	};
}

export interface OneWayMinimum {
	/** s; least arrival − stamp: clock offset plus least transit, which one-way stamps cannot tell apart */
	readonly minimum: number;
	/** Index of the first message that has it */
	readonly index: number;
	readonly mean: number;
	/** s each message took longer than the fastest one */
	readonly excess: readonly number[];
}

/** What one-way messages say: stamps by the sender's clock, arrivals by the receiver's, both s. Null without messages. */
export function computeOneWayMinimum(stamps: readonly number[], arrivals: readonly number[]): OneWayMinimum | null {
	if (stamps.length === 0) return null;
	const differences = stamps.map((stamp, i) => arrivals[i]! - stamp);
	const index = differences.reduce((best, difference, i) => (difference < differences[best]! ? i : best), 0);
	const minimum = differences[index]!;
	return {
		minimum,
		index,
		mean: differences.reduce((sum, difference) => sum + difference, 0) / differences.length,
		excess: differences.map((difference) => difference - minimum)
	};
}

export interface SkewLine {
	/** s, arrival − stamp of an undelayed message at stamp 0 */
	readonly intercept: number;
	/** s/s the receiver's clock gains on the sender's */
	readonly skew: number;
	/** Indices of the two messages the line rests on, ascending */
	readonly support: readonly [number, number];
	/** s, summed excess over the line */
	readonly cost: number;
}

/**
 * The line under all points (stamp, arrival − stamp) with the least summed excess (Moon, Skelly & Towsley 1999, from
 * memory). That linear programme is solved by the edge of the lower hull that spans the mean stamp, because the sum is
 * n times the excess there. Null with fewer than two different stamps.
 */
export function fitSkew(stamps: readonly number[], arrivals: readonly number[]): SkewLine | null {
	const excess = (i: number) => arrivals[i]! - stamps[i]!;
	const order = stamps.map((_, i) => i).sort((i, j) => stamps[i]! - stamps[j]! || excess(i) - excess(j) || i - j);
	const distinct = order.filter((i, k) => k === 0 || stamps[i] !== stamps[order[k - 1]!]);
	if (distinct.length < 2) return null;
	const hull: number[] = [];
	for (const i of distinct) {
		while (hull.length >= 2 && isAbove(hull.at(-1)!, hull.at(-2)!, i)) hull.pop();
		hull.push(i);
	}
	const mean = stamps.reduce((sum, stamp) => sum + stamp, 0) / stamps.length;
	// When the mean falls on a corner both its edges cost the same; the earlier one is taken.
	const right = Math.max(
		1,
		hull.findIndex((i) => stamps[i]! >= mean)
	);
	const [i, j] = [hull[right - 1]!, hull[right]!];
	const skew = (excess(j) - excess(i)) / (stamps[j]! - stamps[i]!);
	const intercept = excess(j) - skew * stamps[j]!;
	return {
		intercept,
		skew,
		support: i < j ? [i, j] : [j, i],
		cost: stamps.reduce((sum, stamp, k) => sum + excess(k) - intercept - skew * stamp, 0)
	};

	/** Does `middle` lie above the line from `left` to `end`, so that the hull passes below it? */
	function isAbove(middle: number, left: number, end: number): boolean {
		const slope = (excess(end) - excess(left)) / (stamps[end]! - stamps[left]!);
		return excess(middle) > excess(left) + slope * (stamps[middle]! - stamps[left]!) + 1e-12;
	}
}

/** s a clock that drifts by `ppm` parts per million is wrong after `seconds`: 15 ppm is 54 ms an hour, 1.3 s a day. */
export const driftError = (ppm: number, seconds: number): number => ppm * 1e-6 * seconds;
