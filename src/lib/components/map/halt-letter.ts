/** The letter that stands for a kind of halt on the plan and in its key. Silent has none: the hollow mark says it. */

import type { HaltKind } from '../../contracts/live.ts';

export const HALT_LETTERS: Readonly<Record<HaltKind, string>> = {
	freeze: 'F',
	stall: 'S',
	dither: 'D',
	fault: 'X',
	silent: '?'
};
