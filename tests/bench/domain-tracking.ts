/** Tracking under load: many robots that look at the same people in one instant. */

import { fuseReports, type PositionEstimate } from '../../src/lib/domain/tracking/fusion.ts';
import { chiSquareGate } from '../../src/lib/domain/tracking/gating.ts';
import {
	confirmedTracks,
	startTracker,
	stepTracker,
	stepTrackerAll,
	type PersonScan,
	type TrackerState
} from '../../src/lib/domain/tracking/person-tracks.ts';

interface Part {
	readonly name: string;
	readonly ours: () => void;
	/** The same result the plain way: every report against everybody known, all pairs. */
	readonly straightforward: () => void;
	readonly target_ms: number;
}

const SD = 0.05;
const RANGE = 5;

/** Parts of the bench, ready to be called again and again; each call does one instant of work from the same start. */
export function trackingParts(): Part[] {
	const crowd = gridOfPeople(15, 20, 1.1);
	const scans = Array.from({ length: 50 }, (_, r) => lookAround(`robot-${r}`, crowd, 20, 10, r));
	const before = scans.reduce((state, scan) => stepTracker(state, { ...scan, time: 9.9 }), startTracker());

	const hall = gridOfPeople(20, 25, 1);
	const all = lookAround('all', hall, hall.length, 9.8, 0);
	const known = stepTracker(stepTracker(startTracker(), all), { ...all, time: 9.9 });
	const one = lookAround('one', hall, 20, 10, 7);

	return [
		{
			name: 'fuse 50 robots × 20 persons',
			ours: () => check(stepTrackerAll(before, scans), before),
			straightforward: () => fusePlainly(before, scans),
			target_ms: 10
		},
		{
			name: 'one scan of 20 persons against 500 tracks',
			ours: () => check(stepTracker(known, one), known),
			straightforward: () => fusePlainly(known, [one]),
			target_ms: 0.5
		}
	];
}

/** Nobody may appear or vanish when the same people are seen again. */
function check(after: TrackerState, before: TrackerState): void {
	const [now, then] = [confirmedTracks(after, 10).length, before.tracks.length];
	if (now > then) throw new Error(`${then} people became ${now}.`);
}

function fusePlainly(state: TrackerState, scans: readonly PersonScan[]): void {
	const round = { xx: SD * SD, xy: 0, yy: SD * SD };
	const gate = chiSquareGate(0.99, 2);
	let known: PositionEstimate[] = state.tracks.map(({ x, y }) => ({ x, y, covariance: round }));
	for (const { persons } of scans) {
		const reports = persons.map(({ x, y }) => ({ x, y, covariance: round }));
		const { pairs, fused } = fuseReports(known, reports, gate, round);
		const paired = new Map(pairs.map(([row], k) => [row, fused[k]!]));
		const columns = new Set(pairs.map(([, column]) => column));
		known = [...known.map((one, i) => paired.get(i) ?? one), ...reports.filter((_, j) => !columns.has(j))];
	}
}

const gridOfPeople = (columns: number, rows: number, spacing: number) =>
	Array.from({ length: columns * rows }, (_, k) => ({
		x: (k % columns) * spacing,
		y: Math.floor(k / columns) * spacing
	}));

/** The `count` people nearest to where a robot happens to stand, a little off, always the same way. */
function lookAround(
	robot: string,
	people: readonly { x: number; y: number }[],
	count: number,
	time: number,
	seed: number
): PersonScan {
	const centre = people[(seed * 37) % people.length]!;
	const away = (p: { x: number; y: number }) => Math.hypot(p.x - centre.x, p.y - centre.y);
	const nearest = people.map((person, id) => ({ ...person, id })).sort((a, b) => away(a) - away(b));
	const persons = nearest.slice(0, count).map(({ x, y, id }) => ({
		localId: String(id),
		x: x + SD * Math.sin(seed + 7 * id),
		y: y + SD * Math.cos(3 * seed + id),
		vx: null,
		vy: null,
		sd: SD
	}));
	return { robot, time, persons, sees: (x, y) => away({ x, y }) <= Math.min(RANGE, away(nearest[count - 1]!)) };
}
