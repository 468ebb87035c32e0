/** A halt in words: what kind it is, what the verdict says, and the numbers behind it. Missing numbers are said to be missing. */

import type { HaltKind, Verdict } from '../../contracts/live.ts';
import { density, people, share, speed, metres } from '../ui/format.ts';

export const KIND_WORDS: Readonly<Record<HaltKind, string>> = {
	freeze: 'people in the way',
	stall: 'nobody in the way',
	dither: 'moving, not advancing',
	fault: 'the robot reports it',
	silent: 'no data'
};

export const VERDICT_WORDS: Readonly<Record<Verdict, string>> = {
	open: 'There was room: look at the robot.',
	shared: 'There was room only if people yield: the robot’s planner is too timid.',
	packed: 'There was no room even if people yield: a matter for the venue, not for the robot.',
	unseen: 'Too little was observed to say why.'
};

/** What the evidence of a halt is drawn from; live halts and stored incidents both have it. */
export interface Evidence {
	readonly persons_within_2m: number | null;
	readonly nearest_person_m: number | null;
	readonly density_per_m2: number | null;
	/** Observed share behind the density, 0…1 */
	readonly coverage: number | null;
	readonly room_alone_m_s: number | null;
	readonly room_shared_m_s: number | null;
}

/** For example `4 people within 2 m, density 1.3/m² (coverage 82 %); room alone 0.00 m/s, shared 0.42 m/s`. */
export function describeEvidence(evidence: Evidence): string {
	const { persons_within_2m: near, nearest_person_m: nearest, density_per_m2, coverage } = evidence;
	const who = near === null ? 'people within 2\u00a0m not measured' : `${people(near)} within 2\u00a0m`;
	const closest = nearest === null || near === 0 ? '' : `, the nearest at ${metres(nearest)}`;
	const covered = coverage === null ? '' : ` (coverage ${share(coverage)})`;
	const alone = evidence.room_alone_m_s;
	const shared = evidence.room_shared_m_s;
	const room =
		alone === null && shared === null
			? 'room to move not measured'
			: `room alone ${speed(alone)}, shared ${speed(shared)}`;
	return `${who}${closest}, density ${density(density_per_m2)}${covered}; ${room}`;
}
