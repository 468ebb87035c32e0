/** From the engine's picture to what goes over the wire: ms, snake_case, and no more digits than are worth anything. */

import type { FloorModel } from '../domain/engine/floor-model.ts';
import type { FieldResult, Frame, PersonPoint, RobotPicture, ZoneResult } from '../domain/engine/frame.ts';
import type { Moment, OpenHalt } from '../domain/engine/robot-view.ts';
import type { Zone } from '../domain/floor.ts';
import { msFromSeconds } from '../domain/units.ts';
import type { LiveField, LiveFrame, LiveHalt, LivePerson, LiveRobot, LiveZone } from './live.ts';

/** 1 cm, 0.01 m/s */
const hundredth = (value: number): number => Math.round(value * 100) / 100;
const orNull = (value: number | null | undefined): number | null =>
	value === null || value === undefined || !Number.isFinite(value) ? null : hundredth(value);
const msOrNull = (seconds: number | null): number | null => (seconds === null ? null : msFromSeconds(seconds));

export function toLiveFrame(venue: string, { floor }: FloorModel, frame: Frame): LiveFrame {
	return {
		floor: floor.key,
		venue,
		server_time_ms: msFromSeconds(frame.time),
		robots: frame.robots.map((robot) => toLiveRobot(robot, frame.time)),
		persons: frame.persons.map(toLivePerson),
		zones: floor.zones.flatMap((zone) => {
			const result = frame.zones.find(({ key }) => key === zone.key);
			return result ? [toLiveZone(zone, result)] : [];
		}),
		halts: frame.halts.map(toLiveHalt),
		observed_m2: hundredth(frame.observedArea),
		coverage: frame.coverage,
		flexibility: {
			value_m_s: frame.flexibility.value,
			n: frame.flexibility.n,
			learned: frame.flexibility.learned,
			noise_floor_m_s: frame.flexibility.noiseFloor
		}
	};
}

function toLiveRobot({ view, pose, condition, zone, moment }: RobotPicture, now: number): LiveRobot {
	const { robot, state, task, open, link, offset } = view;
	return {
		key: robot.key,
		mark: robot.mark,
		model: robot.model.key,
		x_m: orNull(pose?.x),
		y_m: orNull(pose?.y),
		heading_rad: orNull(pose?.heading),
		speed_m_s: orNull(pose?.speed),
		condition,
		pose_age_ms: pose ? Math.max(0, msFromSeconds(now - pose.time)) : null,
		link,
		localized: state?.localized ?? null,
		tasked: state?.tasked ?? null,
		battery: orNull(state?.battery),
		goal: task ? { x_m: hundredth(task.goal.x), y_m: hundredth(task.goal.y) } : null,
		zone,
		density_per_m2: orNull(moment?.density),
		room_alone_m_s: orNull(moment?.roomAlone),
		room_shared_m_s: orNull(moment?.roomShared),
		clock_offset_ms: msOrNull(offset),
		incident: open?.incident ?? null,
		software: state?.software ?? null,
		errors: state?.errors ?? []
	};
}

const toLivePerson = ({ id, x, y, vx, vy, seenBy, age }: PersonPoint): LivePerson => ({
	id,
	x_m: hundredth(x),
	y_m: hundredth(y),
	vx_m_s: hundredth(vx),
	vy_m_s: hundredth(vy),
	seen_by: seenBy,
	age_ms: msFromSeconds(age)
});

/** Densities keep all their digits: rounding for the eye is the screen's business. */
const toLiveZone = (zone: Zone, result: ZoneResult): LiveZone => ({
	key: zone.key,
	name: zone.name,
	density_per_m2: result.density,
	classic_per_m2: result.classic,
	coverage: result.coverage,
	observed_m2: hundredth(result.observedArea),
	persons: result.persons,
	level: result.level,
	scheme: zone.scheme,
	threshold_per_m2: zone.threshold,
	above_threshold: result.aboveThreshold,
	private: zone.private
});

export function toLiveHalt(halt: OpenHalt): LiveHalt {
	const evidence: Moment | null = halt.at ?? halt.before;
	const before: Moment | null = halt.before ?? halt.at;
	return {
		incident: halt.incident,
		robot: halt.robot,
		kind: halt.kind,
		verdict: halt.verdict,
		onset_ms: msFromSeconds(halt.onset),
		detected_ms: msFromSeconds(halt.detectedAt),
		x_m: hundredth(halt.x),
		y_m: hundredth(halt.y),
		zone: halt.zone,
		density_per_m2: orNull(before?.density),
		coverage: orNull(before?.coverage),
		room_alone_m_s: orNull(evidence?.roomAlone),
		room_shared_m_s: orNull(evidence?.roomShared),
		persons_within_2m: evidence?.personsWithin2m ?? null,
		nearest_person_m: orNull(evidence?.nearestPerson),
		cause_group: halt.causeGroup
	};
}

/** persons/m² at the top of the heat scale; denser cells are drawn like this one. */
export const FIELD_MAX_PER_M2 = 4;
const UNOBSERVED = 255;

export function toLiveField({ floor, grid }: FloorModel, field: FieldResult): LiveField {
	const cells = new Uint8Array(field.values.length);
	for (let index = 0; index < cells.length; index++) {
		const value = field.values[index]!;
		cells[index] = Number.isNaN(value)
			? UNOBSERVED
			: Math.min(UNOBSERVED - 1, Math.round((value / FIELD_MAX_PER_M2) * (UNOBSERVED - 1)));
	}
	return {
		floor: floor.key,
		server_time_ms: msFromSeconds(field.time),
		x0_m: grid.x0,
		y0_m: grid.y0,
		cell_m: grid.cell,
		cols: grid.cols,
		rows: grid.rows,
		max_per_m2: FIELD_MAX_PER_M2,
		cells: encodeRuns(cells)
	};
}

/** Base64 of (value, run) pairs, runs of 1…255. */
export function encodeRuns(values: Uint8Array): string {
	const pairs: number[] = [];
	for (let index = 0; index < values.length;) {
		const value = values[index]!;
		let run = 1;
		while (run < 255 && index + run < values.length && values[index + run] === value) run += 1;
		pairs.push(value, run);
		index += run;
	}
	let text = '';
	for (const byte of pairs) text += String.fromCharCode(byte);
	return btoa(text);
}

/** @throws RangeError when the runs do not give exactly `length` values */
export function decodeRuns(text: string, length: number): Uint8Array {
	const bytes = atob(text);
	const values = new Uint8Array(length);
	let at = 0;
	for (let index = 0; index + 1 < bytes.length; index += 2) {
		const run = bytes.charCodeAt(index + 1);
		values.fill(bytes.charCodeAt(index), at, at + run);
		at += run;
	}
	if (at !== length) throw new RangeError(`The field holds ${at} cells where ${length} were announced.`);
	return values;
}
