/** Does a message continue its channel? Pure: one step per message of one robot and one channel. */

/** Messages in a row, rising among themselves, that make a counter below the last one a new counter; chosen by us: half a second at 10 Hz. */
export const RESTART_RUN = 5;

export interface SequenceState {
	/** Of the last message accepted */
	readonly seq: number;
	/** Its stamp, ms, the robot's clock */
	readonly tMs: number;
	/** Refused messages since then, as long as each is later than the one before; null when there is none. */
	readonly run: { readonly seq: number; readonly tMs: number; readonly length: number } | null;
}

export type SequenceVerdict = 'first' | 'next' | 'restart' | 'out_of_order';

/**
 * The verdict on a message and the state after it.
 *
 * - A higher number is the next one, whatever the clock says: clocks are set back, numbers may be lost.
 * - A number that is not higher, with a later stamp, is a robot that restarted and counts anew.
 * - A number and a stamp that are not later are a copy or a straggler: out of order. Only when RESTART_RUN of them
 *   come in a row, each later than the one before and no accepted message between, has the robot restarted with its
 *   clock set back too.
 *
 * @param last null before the first message
 * @param tMs stamp of the message, ms, the robot's clock
 */
export function stepSequence(
	last: SequenceState | null,
	seq: number,
	tMs: number
): { readonly state: SequenceState; readonly verdict: SequenceVerdict } {
	if (last === null) return accept('first');
	if (seq > last.seq) return accept('next');
	if (tMs > last.tMs) return accept('restart');

	const rises = last.run !== null && seq > last.run.seq && tMs > last.run.tMs;
	const length = rises && last.run !== null ? last.run.length + 1 : 1;
	if (length >= RESTART_RUN) return accept('restart');
	return { state: { seq: last.seq, tMs: last.tMs, run: { seq, tMs, length } }, verdict: 'out_of_order' };

	function accept(verdict: SequenceVerdict) {
		return { state: { seq, tMs, run: null }, verdict };
	}
}
