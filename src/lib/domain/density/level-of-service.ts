/**
 * Level of service of walkways and queues, A (free) to F, by the tables of two handbooks.
 *
 * The handbooks disagree by up to three letters for one and the same crowd: a letter without the name of its scheme
 * says nothing. A letter is no safety verdict. Sources: Fruin 1971, *Pedestrian Planning and Design* and *Designing
 * for Pedestrians: A Level-of-Service Concept*, HRR 355 (space and flow ladders seen in secondary quotations; queue
 * table from memory); TRB, *Highway Capacity Manual* 2000/2010/2016 (A–C in metric form seen; the rest from memory).
 */

import { SQUARE_FOOT_M2 } from '../units.ts';

export type Level = 'A' | 'B' | 'C' | 'D' | 'E' | 'F';

export type LevelOfServiceScheme =
	'fruin_walkway' | 'fruin_queueing' | 'hcm2010_walkway_average' | 'hcm2010_walkway_platoon' | 'hcm2000_queueing';

export interface LevelOfServiceTable {
	/** Name to show beside the letter */
	readonly name: string;
	/** Least space of levels A…E, m²/person */
	readonly spaces: readonly number[];
	/** Whether a value on the bound belongs to the better level, A…E */
	readonly boundIsBetter: readonly boolean[];
	/** Greatest flow of levels A…E, persons/(m·s), bounds included; null where the handbook gives none */
	readonly flows: readonly number[] | null;
}

const LEVELS: readonly Level[] = ['A', 'B', 'C', 'D', 'E', 'F'];

/** Relative; keeps a value on a bound there after conversion through feet or 1/density. Chosen by us. */
const GUARD = 1e-9;

/** 1 ft in m, exact. */
const FOOT_M = 0.3048;

/** persons/(m·s) from persons per minute and foot. Exact factor: 1/(60 · 0.3048). */
export const flowFromPerMinuteFoot = (flow: number): number => flow / (60 * FOOT_M);
/** Persons per minute and foot from persons/(m·s). */
export const perMinuteFootFromFlow = (flow: number): number => flow * 60 * FOOT_M;
/** m² from ft², exact factor. */
export const squareMetresFromFeet = (feet: number): number => feet * SQUARE_FOOT_M2;

const feet = (spaces: readonly number[]) => spaces.map(squareMetresFromFeet);
const perMinuteFoot = (flows: readonly number[]) => flows.map(flowFromPerMinuteFoot);

/** Fruin prints A as "or greater" and F as "or less" and leaves the bounds between open; ours go to the better level. */
const FRUIN_SIDES = [true, true, true, true, false];
/** The Manual prints ">": a value on a bound belongs to the worse level. */
const HCM_SIDES = [false, false, false, false, false];

export const SCHEMES: Readonly<Record<LevelOfServiceScheme, LevelOfServiceTable>> = {
	fruin_walkway: {
		name: 'Fruin, walkway',
		spaces: feet([35, 25, 15, 10, 5]),
		boundIsBetter: FRUIN_SIDES,
		flows: perMinuteFoot([7, 10, 15, 20, 25])
	},
	fruin_queueing: {
		name: 'Fruin, queue',
		spaces: feet([13, 10, 7, 3, 2]),
		boundIsBetter: FRUIN_SIDES,
		flows: null
	},
	hcm2010_walkway_average: {
		name: 'HCM 2010, walkway, average flow',
		spaces: feet([60, 40, 24, 15, 8]),
		boundIsBetter: HCM_SIDES,
		flows: perMinuteFoot([5, 7, 10, 15, 23])
	},
	hcm2010_walkway_platoon: {
		name: 'HCM 2010, walkway, platoons',
		spaces: feet([530, 90, 40, 23, 11]),
		boundIsBetter: HCM_SIDES,
		flows: perMinuteFoot([0.5, 3, 6, 11, 18])
	},
	hcm2000_queueing: {
		name: 'HCM 2000, queue',
		spaces: [1.2, 0.9, 0.6, 0.3, 0.2],
		boundIsBetter: HCM_SIDES,
		flows: null
	}
};

export const SCHEME_NAMES = Object.keys(SCHEMES) as LevelOfServiceScheme[];

/** Level for a space in m²/person; Infinity is A. Null for a space that is missing, NaN or negative. */
export function levelOfSpace(scheme: LevelOfServiceScheme, space: number | null): Level | null {
	if (space === null || !(space >= 0)) return null;
	const { spaces, boundIsBetter } = SCHEMES[scheme];
	const index = spaces.findIndex((bound, k) => {
		const guard = GUARD * bound;
		return space > bound + guard || (boundIsBetter[k] === true && space >= bound - guard);
	});
	return LEVELS[index < 0 ? 5 : index]!;
}

/** Level for a density in persons/m²; 0 is A. Null ("not measured") stays null, as do NaN and negative values. */
export function levelOfDensity(scheme: LevelOfServiceScheme, density: number | null): Level | null {
	return density === null || !(density >= 0) ? null : levelOfSpace(scheme, 1 / density);
}

/**
 * Level for a specific flow in persons/(m·s); above the greatest bound it is F. Null for a missing, NaN or negative
 * flow and for schemes without a flow ladder. The same flow occurs in a free and in a jammed crowd: prefer density.
 */
export function levelOfFlow(scheme: LevelOfServiceScheme, flow: number | null): Level | null {
	const { flows } = SCHEMES[scheme];
	if (!flows || flow === null || !(flow >= 0)) return null;
	const index = flows.findIndex((bound) => flow <= bound * (1 + GUARD));
	return LEVELS[index < 0 ? 5 : index]!;
}

/** A letter that does not flicker. */
export interface LevelState {
	/** Null before the first measurement and while nothing is measured. */
	readonly level: Level | null;
	/** s; since when the density has been beyond the level's band on one side; null while it is not. */
	readonly beyond: { readonly side: 'better' | 'worse'; readonly since: number } | null;
}

export const NO_LEVEL: LevelState = { level: null, beyond: null };

export interface LevelRule {
	/** Share of the density by which a bound must be passed, 0…1, for example 0.1. */
	readonly margin: number;
	/** s the density must stay beyond the bound before the letter changes. */
	readonly dwell: number;
}

/**
 * The letter after one more density. It changes when the density has been past the bound by more than the margin,
 * always on the same side, for the dwell time. The first measurement counts at once; null or NaN clears the letter
 * at once, since an old letter would pass for a measured one.
 *
 * @param density persons/m²
 * @param now s; must not decrease between calls
 */
export function stepLevel(
	state: LevelState,
	scheme: LevelOfServiceScheme,
	density: number | null,
	now: number,
	{ margin, dwell }: LevelRule
): LevelState {
	const level = levelOfDensity(scheme, density);
	if (level === null || density === null) return NO_LEVEL;
	if (state.level === null) return { level, beyond: null };
	const side =
		levelOfDensity(scheme, density * (1 - margin))! > state.level
			? 'worse'
			: levelOfDensity(scheme, density * (1 + margin))! < state.level
				? 'better'
				: null;
	if (side === null) return state.beyond === null ? state : { level: state.level, beyond: null };
	const since = state.beyond?.side === side ? state.beyond.since : now;
	return now - since >= dwell ? { level, beyond: null } : { level: state.level, beyond: { side, since } };
}
