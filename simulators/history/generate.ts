/** One invented day of one floor: density minutes, exposure minutes, and the halts and alarms that go with them. Pure. */

import type { HaltKind, Verdict } from '../../src/lib/contracts/live.ts';
import type { Moment } from '../../src/lib/domain/engine/robot-view.ts';
import { bandOf } from '../../src/lib/domain/engine/tally.ts';
import { DEFAULT_FLEXIBILITY_RULE } from '../../src/lib/domain/room/flexibility.ts';
import type { Point } from '../../src/lib/domain/geometry/types.ts';
import type { Random } from '../core/random.ts';
import { OPEN_MINUTES, zoneMinutes, type OpenDay } from './days.ts';
import { haltRate, haltSeconds, KINDS, roomFor } from './law.ts';

export interface HistoryZone {
	readonly id: number;
	readonly key: string;
	readonly name: string;
	/** Walkable m² */
	readonly area: number;
	readonly private: boolean;
	/** Walkable points robots may stand at; at least one */
	readonly points: readonly Point[];
}

export interface HistoryFloor {
	readonly id: number;
	readonly key: string;
	readonly name: string;
	readonly zones: readonly HistoryZone[];
}

export interface HistoryRobot {
	readonly id: number;
	readonly key: string;
	readonly mark: string;
	readonly model: string;
	readonly maxSpeed: number;
	/** Gets the newer software when it comes out */
	readonly early: boolean;
}

export interface DensityRow {
	readonly zone: number;
	readonly minuteMs: number;
	readonly mean: number | null;
	readonly peak: number | null;
	readonly coverage: number;
	readonly observedAreaS: number;
	readonly personS: number;
}

export interface ExposureRow {
	readonly robot: number;
	readonly zone: number;
	readonly minuteMs: number;
	readonly band: string;
	taskedS: number;
	movingS: number;
	distance: number;
	halts: number;
}

export interface HistoryHalt {
	readonly robot: HistoryRobot;
	readonly zone: HistoryZone;
	readonly kind: HaltKind;
	readonly verdict: Verdict;
	readonly onsetMs: number;
	readonly detectedMs: number;
	readonly endedMs: number;
	readonly place: Point;
	readonly heading: number;
	readonly moment: Moment;
	readonly software: string;
	readonly task: string;
	/** ms; after the end when nobody looked in time */
	readonly acknowledgedMs: number;
}

export interface HistoryDay {
	readonly density: readonly DensityRow[];
	readonly exposure: readonly ExposureRow[];
	/** By onset */
	readonly halts: readonly HistoryHalt[];
}

/** s after onset at which each kind is noticed */
const NOTICED_AFTER: Record<HaltKind, number> = { freeze: 8, dither: 8, stall: 8, silent: 3.2, fault: 0.4 };
/** Share of minutes in which too little floor round the robot was seen. */
const UNSEEN = 0.04;
const LEAST_COVERAGE = 0.3;

export function generateDay(
	day: OpenDay,
	floor: HistoryFloor,
	robots: readonly HistoryRobot[],
	newer: boolean,
	random: Random
): HistoryDay {
	const open = floor.zones.filter((zone) => !zone.private);
	const levels = open.map((zone) => zoneMinutes(zone.key, day, random.fork(`${zone.key}/${day.opensMs}`)));
	const density = open.flatMap((zone, z) => densityRows(zone, day, levels[z]!, random));
	const exposure: ExposureRow[] = [];
	const halts: HistoryHalt[] = [];
	for (const robot of robots) {
		driveDay(
			robot,
			day,
			open,
			levels,
			newer && robot.early,
			random.fork(`${robot.key}/${day.opensMs}`),
			exposure,
			halts
		);
	}
	exposure.sort(
		(a, b) => a.minuteMs - b.minuteMs || a.robot - b.robot || a.zone - b.zone || (a.band < b.band ? -1 : 1)
	);
	halts.sort((a, b) => a.onsetMs - b.onsetMs);
	return { density, exposure, halts };
}

function densityRows(zone: HistoryZone, day: OpenDay, level: Float64Array, random: Random): DensityRow[] {
	const rows: DensityRow[] = [];
	let seen = random.between(0.3, 0.9);
	for (let m = 0; m < OPEN_MINUTES; m++) {
		seen = round(Math.min(0.95, Math.max(0.05, seen + random.normal(0, 0.06))), 3);
		const observedAreaS = zone.area * seen * 60;
		const measured = seen >= LEAST_COVERAGE;
		// Heads counted in what was seen: the mean wobbles as a count of that size does.
		const heads = Math.max(
			0,
			level[m]! * zone.area * seen + random.normal(0, Math.sqrt(0.2 * level[m]! * zone.area * seen))
		);
		const mean = heads / (zone.area * seen);
		rows.push({
			zone: zone.id,
			minuteMs: day.opensMs + m * 60_000,
			mean: measured ? round(mean, 4) : null,
			peak: measured ? round(mean * (1.1 + random.exponential(0.25)), 4) : null,
			coverage: seen,
			observedAreaS: round(observedAreaS, 1),
			personS: round(heads * 60, 1)
		});
	}
	return rows;
}

/** One robot's day: errands from zone to zone, idle spells between, and the halts the law gives it. */
function driveDay(
	robot: HistoryRobot,
	day: OpenDay,
	zones: readonly HistoryZone[],
	levels: readonly Float64Array[],
	newer: boolean,
	random: Random,
	exposure: ExposureRow[],
	halts: HistoryHalt[]
): void {
	const weights = zones.map(({ area }) => Math.sqrt(area));
	const software = `${robot.model} ${newer ? '5.0.1' : '4.2.0'}`;
	let zone = random.weighted(weights);
	let idleUntil = 0;
	let errand = 0;
	/** s after opening before which the robot still stands in a halt */
	let free = 0;
	for (let m = 0; m < OPEN_MINUTES; m++) {
		if (random.chance(0.3)) zone = random.weighted(weights);
		if (m < idleUntil || free >= (m + 1) * 60) continue;
		if (random.chance(0.09)) {
			idleUntil = m + 1 + Math.round(random.exponential(7));
			errand++;
			continue;
		}
		const place = zones[zone]!;
		const local = levels[zone]![m]! * Math.exp(random.normal(-0.15, 0.55));
		const unseen = random.chance(UNSEEN);
		const row: ExposureRow = {
			robot: robot.id,
			zone: place.id,
			minuteMs: day.opensMs + m * 60_000,
			band: bandOf(unseen ? null : local),
			taskedS: 0,
			movingS: 0,
			distance: 0,
			halts: 0
		};
		const from = Math.max(free, m * 60);
		const tasked = (m + 1) * 60 - from;
		const kind = drawHalt(local, newer, tasked, random);
		const onset = kind ? from + random.next() * tasked : (m + 1) * 60;
		row.taskedS = round(onset - from, 1);
		row.movingS = round(row.taskedS * random.between(0.75, 0.98), 1);
		row.distance = round(row.movingS * robot.maxSpeed * Math.max(0.3, 0.85 - 0.3 * local) * random.between(0.85, 1), 1);
		if (kind) {
			const end = onset + haltSeconds(kind, local, random);
			row.halts = 1;
			free = end;
			halts.push(
				describe(
					kind,
					robot,
					place,
					day.opensMs + onset * 1000,
					day.opensMs + end * 1000,
					local,
					unseen,
					software,
					`${robot.key}-${errand}`,
					random
				)
			);
		}
		exposure.push(row);
	}
}

/** Kind of the halt that begins within `seconds` of tasked time, or null. */
function drawHalt(density: number, newer: boolean, seconds: number, random: Random): HaltKind | null {
	const rates = KINDS.map((kind) => haltRate(kind, density, newer));
	const total = rates.reduce((sum, rate) => sum + rate, 0);
	if (!random.chance(1 - Math.exp((-total * seconds) / 3600))) return null;
	return KINDS[random.weighted(rates)]!;
}

function describe(
	kind: HaltKind,
	robot: HistoryRobot,
	zone: HistoryZone,
	onset: number,
	end: number,
	density: number,
	unseen: boolean,
	software: string,
	task: string,
	random: Random
): HistoryHalt {
	const onsetMs = Math.round(onset);
	const detectedMs = Math.round(onset + NOTICED_AFTER[kind] * 1000);
	const { verdict, roomAlone, roomShared, observedShare } = unseen
		? { verdict: 'unseen' as const, roomAlone: null, roomShared: null, observedShare: 0.2 }
		: roomFor(kind, density, random);
	const persons = kind === 'freeze' ? Math.max(1, random.poisson(density * 4 * Math.PI)) : random.poisson(density * 4);
	const moment: Moment = {
		time: round(onsetMs / 1000, 3),
		density: unseen ? null : round(density, 3),
		coverage: round(observedShare, 3),
		personsWithin2m: persons,
		nearestPerson: persons > 0 ? round(0.55 + random.exponential(1 / (1 + persons)), 2) : null,
		roomAlone: roomAlone === null ? null : round(roomAlone, 3),
		roomShared: roomShared === null ? null : round(roomShared, 3),
		limitedByPeople: roomAlone === null ? null : verdict !== 'open',
		observedShare: round(observedShare, 3),
		flexibility: DEFAULT_FLEXIBILITY_RULE.fallback,
		verdict
	};
	const endedMs = Math.max(Math.round(end), detectedMs + 1000);
	const reaction = Math.min(600, 22 * Math.exp(random.normal(0, 0.9)));
	const looked = random.chance(0.92);
	return {
		robot,
		zone,
		kind,
		verdict,
		onsetMs,
		detectedMs,
		endedMs,
		place: random.pick(zone.points),
		heading: round(random.between(-Math.PI, Math.PI), 3),
		moment,
		software,
		task,
		acknowledgedMs: looked
			? detectedMs + Math.round(reaction * 1000)
			: endedMs + Math.round(random.between(60, 1800) * 1000)
	};
}

const round = (value: number, digits: number): number => Number(value.toFixed(digits));
