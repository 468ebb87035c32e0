/**
 * The law the invented past weeks follow, so that reports about them have a known answer. Halts come as a Poisson process per
 * robot-hour of tasked time; its rate depends on the density ρ (persons/m²) round the robot:
 *
 *     rate(ρ) = base · exp(slope · min(ρ, 2))      halts per robot-hour
 *
 * Freezes and dithers rise with density; stalls, faults and silences do not. From `NEW_SOFTWARE_WEEK` on a third of the robots
 * run newer software that freezes at `NEW_SOFTWARE_RATIO` times the rate. All numbers are invented.
 */

import type { HaltKind, Verdict } from '../../src/lib/contracts/live.ts';
import type { Random } from '../core/random.ts';

export const LAW: Record<HaltKind, { readonly base: number; readonly slope: number }> = {
	freeze: { base: 0.08, slope: 2.3 },
	dither: { base: 0.012, slope: 1.8 },
	stall: { base: 0.05, slope: 0 },
	fault: { base: 0.025, slope: 0 },
	silent: { base: 0.03, slope: 0 }
};

export const NEW_SOFTWARE_WEEK = 5;
export const NEW_SOFTWARE_RATIO = 0.55;

export const KINDS = Object.keys(LAW) as HaltKind[];

/** Halts per robot-hour of one kind. @param newer whether the robot runs the newer software */
export function haltRate(kind: HaltKind, density: number, newer: boolean): number {
	const { base, slope } = LAW[kind];
	const ratio = newer && kind === 'freeze' ? NEW_SOFTWARE_RATIO : 1;
	return ratio * base * Math.exp(slope * Math.min(density, 2));
}

/** s a halt lasts: log-normal about a median, longer where it is fuller. */
export function haltSeconds(kind: HaltKind, density: number, random: Random): number {
	const median = { freeze: 28 + 30 * Math.min(density, 2), dither: 16, stall: 45, fault: 110, silent: 35 }[kind];
	return Math.min(1500, Math.max(9, median * Math.exp(random.normal(0, 0.7))));
}

/** Room and verdict that fit together: `packed` becomes likelier, `open` rarer with density. */
export function roomFor(
	kind: HaltKind,
	density: number,
	random: Random
): { verdict: Verdict; roomAlone: number | null; roomShared: number | null; observedShare: number } {
	const observedShare = Math.min(1, Math.max(0.1, random.normal(0.72, 0.18)));
	if (kind === 'silent' || observedShare < 0.35)
		return { verdict: 'unseen', roomAlone: null, roomShared: null, observedShare };
	if (kind !== 'freeze' && kind !== 'dither') {
		const room = random.between(0.4, 1.1);
		return { verdict: 'open', roomAlone: room, roomShared: room, observedShare };
	}
	const weights = [0.35, 1.3, 0.3 + 0.9 * density];
	const verdict = (['open', 'shared', 'packed'] as const)[random.weighted(weights)]!;
	const roomAlone = verdict === 'open' ? random.between(0.26, 0.9) : random.between(0, 0.2);
	const roomShared =
		verdict === 'shared'
			? random.between(0.27, 0.75)
			: verdict === 'open'
				? roomAlone + random.between(0, 0.2)
				: random.between(roomAlone, 0.24);
	return { verdict, roomAlone, roomShared, observedShare };
}
