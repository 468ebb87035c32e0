/** Minutes of density and of exposure, counted up as the engine runs and handed out once they are complete. */

import type { DensityMinute, ExposureMinute } from './events.ts';
import type { ZoneResult } from './frame.ts';

/**
 * Lower bounds of the density bands, persons/m². Exposure and halts are counted in the band of the density round the robot;
 * finer where robots start to meet people (chosen by us).
 */
export const DENSITY_BANDS = [0, 0.05, 0.1, 0.2, 0.5, 1, 2] as const;

/** Name of a band: `0.2-0.5`, `2+`, or `unseen` when too little floor was observed. */
export function bandOf(density: number | null): string {
	if (density === null || !(density >= 0)) return 'unseen';
	const index = DENSITY_BANDS.findLastIndex((from) => density >= from);
	const to = DENSITY_BANDS[index + 1];
	return to === undefined ? `${DENSITY_BANDS[index]}+` : `${DENSITY_BANDS[index]}-${to}`;
}

/** One robot's drive during one tick, held back until it is known not to lie inside a halt. */
export interface Drive {
	/** s, end of the tick */
	readonly time: number;
	readonly robot: string;
	readonly zone: string | null;
	readonly band: string;
	readonly taskedS: number;
	readonly movingS: number;
	readonly distance: number;
	readonly halts: number;
}

interface DensitySum {
	readonly results: number;
	readonly measured: number;
	readonly density: number;
	readonly peak: number;
	readonly coverage: number;
	readonly observedAreaS: number;
	readonly personS: number;
}

export interface Tally {
	/** Drives not yet old enough to be counted, oldest first */
	readonly pending: readonly Drive[];
	readonly exposure: ReadonlyMap<string, ExposureMinute>;
	readonly density: ReadonlyMap<string, { readonly zone: string; readonly minute: number; readonly sum: DensitySum }>;
}

export const EMPTY_TALLY: Tally = { pending: [], exposure: new Map(), density: new Map() };

/** s a drive is held back: longer than the window plus hold after which a halt is noticed. */
export const HELD_BACK_S = 15;

const minuteOf = (time: number): number => Math.floor(time / 60) * 60;

export const addDrives = (tally: Tally, drives: readonly Drive[]): Tally =>
	drives.length === 0 ? tally : { ...tally, pending: [...tally.pending, ...drives] };

/** Takes back what a robot seemed to drive after its halt began, and counts the halt in the band it began in. */
export function stopClock(tally: Tally, robot: string, onset: number, zone: string | null, band: string): Tally {
	const kept = tally.pending.filter((drive) => drive.robot !== robot || drive.time <= onset);
	const halt: Drive = { time: onset, robot, zone, band, taskedS: 0, movingS: 0, distance: 0, halts: 1 };
	return { ...tally, pending: [...kept, halt] };
}

/** Adds one density result per zone, valid for `seconds`. */
export function addDensity(tally: Tally, zones: readonly ZoneResult[], time: number, seconds: number): Tally {
	const density = new Map(tally.density);
	const minute = minuteOf(time);
	for (const zone of zones) {
		const name = `${zone.key}@${minute}`;
		const sum = density.get(name)?.sum ?? NO_DENSITY;
		density.set(name, { zone: zone.key, minute, sum: addResult(sum, zone, seconds) });
	}
	return { ...tally, density };
}

const NO_DENSITY: DensitySum = {
	results: 0,
	measured: 0,
	density: 0,
	peak: -Infinity,
	coverage: 0,
	observedAreaS: 0,
	personS: 0
};

function addResult(sum: DensitySum, zone: ZoneResult, seconds: number): DensitySum {
	const { density } = zone;
	return {
		results: sum.results + 1,
		measured: sum.measured + (density === null ? 0 : 1),
		density: sum.density + (density ?? 0),
		peak: density === null ? sum.peak : Math.max(sum.peak, density),
		coverage: sum.coverage + zone.coverage,
		observedAreaS: sum.observedAreaS + zone.observedArea * seconds,
		personS: sum.personS + zone.persons * seconds
	};
}

/** Hands out every minute that can no longer change at `now`. */
export function closeMinutes(
	tally: Tally,
	now: number
): { tally: Tally; density: DensityMinute[]; exposure: ExposureMinute[] } {
	const exposure = new Map(tally.exposure);
	const pending: Drive[] = [];
	for (const drive of tally.pending) {
		if (now - drive.time < HELD_BACK_S) pending.push(drive);
		else addTo(exposure, drive);
	}
	const settled = now - HELD_BACK_S - 60;
	const density = new Map(tally.density);
	const closedDensity: DensityMinute[] = [];
	for (const [name, { zone, minute, sum }] of density) {
		if (minute > settled) continue;
		density.delete(name);
		closedDensity.push({
			zone,
			minute,
			mean: sum.measured > 0 ? sum.density / sum.measured : null,
			peak: sum.measured > 0 ? sum.peak : null,
			coverage: sum.coverage / sum.results,
			observedAreaS: sum.observedAreaS,
			personS: sum.personS
		});
	}
	const closedExposure: ExposureMinute[] = [];
	for (const [name, row] of exposure) {
		if (row.minute > settled) continue;
		exposure.delete(name);
		closedExposure.push(row);
	}
	return { tally: { pending, exposure, density }, density: closedDensity, exposure: closedExposure };
}

function addTo(exposure: Map<string, ExposureMinute>, drive: Drive): void {
	const minute = minuteOf(drive.time);
	const name = `${drive.robot}|${drive.zone ?? ''}|${minute}|${drive.band}`;
	const row = exposure.get(name);
	exposure.set(name, {
		robot: drive.robot,
		zone: drive.zone,
		minute,
		band: drive.band,
		taskedS: (row?.taskedS ?? 0) + drive.taskedS,
		movingS: (row?.movingS ?? 0) + drive.movingS,
		distance: (row?.distance ?? 0) + drive.distance,
		halts: (row?.halts ?? 0) + drive.halts
	});
}
