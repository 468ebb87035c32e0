/** Averages of density. Which one is meant must be said: over time, over persons, over area. */

import { levelOfDensity, type Level, type LevelOfServiceScheme } from './level-of-service.ts';

/** A density in persons/m² that held for `duration` seconds. */
export interface DensitySample {
	readonly density: number;
	readonly duration: number;
}

/** Mean over time, persons/m²; null without any time. */
export function timeMeanDensity(samples: readonly DensitySample[]): number | null {
	const time = sum(samples, ({ duration }) => duration);
	return time > 0 ? sum(samples, ({ density, duration }) => density * duration) / time : null;
}

/** What the average person met, persons/m²: each moment counts by how many were there. Null when nobody ever was. */
export function personMeanDensity(samples: readonly DensitySample[]): number | null {
	const persons = sum(samples, ({ density, duration }) => density * duration);
	return persons > 0 ? sum(samples, ({ density, duration }) => density * density * duration) / persons : null;
}

/** Share of the time spent at a level, 0…1; null without any time. */
export function shareOfTimeAt(
	level: Level,
	scheme: LevelOfServiceScheme,
	samples: readonly DensitySample[]
): number | null {
	const time = sum(samples, ({ duration }) => duration);
	const there = samples.filter(({ density }) => levelOfDensity(scheme, density) === level);
	return time > 0 ? sum(there, ({ duration }) => duration) / time : null;
}

export interface IndividualMeans {
	/** Mean over persons, persons/m² */
	readonly arithmetic: number;
	/** Mean over area, persons/m²: persons divided by the sum of their cells */
	readonly harmonic: number;
}

/** Means of individual (Voronoi) densities in persons/m²; null for an empty list. */
export function meanIndividualDensities(densities: readonly number[]): IndividualMeans | null {
	if (densities.length === 0) return null;
	return {
		arithmetic: sum(densities, (density) => density) / densities.length,
		harmonic: densities.length / sum(densities, (density) => 1 / density)
	};
}

const sum = <T>(items: readonly T[], value: (item: T) => number): number =>
	items.reduce((total, item) => total + value(item), 0);
