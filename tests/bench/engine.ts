/** One tick of the engine under the largest load it is meant for: 200 robots at 10 Hz, 20 persons each, 1,000 in the hall. */

import type { Observation } from '../../src/lib/domain/engine/observation.ts';
import { createVenueContext, createVenueState, stepVenue } from '../../src/lib/domain/engine/venue-engine.ts';
import { DEFAULT_RULES } from '../../src/lib/domain/engine/rules.ts';
import { FLOOR, people, pose, robotNamed, state, T0 } from '../support/room-with-robot.ts';
import type { Floor } from '../../src/lib/domain/floor.ts';

export interface EngineBench {
	readonly robots: number;
	readonly persons: number;
	readonly tick_ms_median: number;
	readonly tick_ms_p99: number;
	/** Processor time per tick, all threads of the process: what is left of a busy machine's noise */
	readonly tick_cpu_ms_mean: number;
	/** The same load with nothing but the bookkeeping of poses: what the fold itself costs */
	readonly poses_only_ms_median: number;
	readonly target_ms: number;
}

const ROBOTS = 200;
const PERSONS = 1000;
const SEEN = 20;
const WIDTH = 120;
const HEIGHT = 80;

const HALL: Floor = {
	...FLOOR,
	walkable: {
		outer: [
			[0, 0],
			[WIDTH, 0],
			[WIDTH, HEIGHT],
			[0, HEIGHT]
		],
		holes: []
	},
	zones: Array.from({ length: 12 }, (_, i) => {
		const x = (i % 4) * 30;
		const y = Math.floor(i / 4) * 26;
		const outer = [
			[x, y],
			[x + 30, y],
			[x + 30, y + 26],
			[x, y + 26]
		] as const;
		return { ...FLOOR.zones[0]!, key: `zone-${i}`, polygon: { outer, holes: [] } };
	})
};

/** Runs `seconds` of simulated time and gives the times of its ticks. */
export function benchEngine(seconds = 12): EngineBench {
	const names = Array.from({ length: ROBOTS }, (_, i) => `r${i}`);
	const context = createVenueContext('bench', [HALL], names.map(robotNamed), DEFAULT_RULES);
	const full = measure(context, names, seconds, true);
	const posesOnly = measure(context, names, seconds, false).times;
	return {
		robots: ROBOTS,
		persons: PERSONS,
		tick_ms_median: quantile(full.times, 0.5),
		tick_ms_p99: quantile(full.times, 0.99),
		tick_cpu_ms_mean: full.cpu,
		poses_only_ms_median: quantile(posesOnly, 0.5),
		target_ms: 20
	};
}

function measure(
	context: Parameters<typeof stepVenue>[0],
	names: readonly string[],
	seconds: number,
	whole: boolean
): { times: number[]; cpu: number } {
	let current = createVenueState(context);
	const times: number[] = [];
	let cpu = 0;
	for (let tick = 0; tick < seconds * 10; tick++) {
		const t = T0 + tick / 10;
		const heard: Observation[] = tick === 0 ? [{ kind: 'listening', receivedAt: T0 - 60, listening: true }] : [];
		names.forEach((robot, i) => heard.push(...messages(robot, i, t, tick, whole)));
		const started = performance.now();
		const before = process.cpuUsage();
		current = stepVenue(context, current, heard, t + 0.05).state;
		// The first two seconds fill tracks, windows and caches.
		if (tick < 20) continue;
		times.push(performance.now() - started);
		const { user, system } = process.cpuUsage(before);
		cpu += (user + system) / 1000;
	}
	return { times: times.sort((a, b) => a - b), cpu: Math.round((100 * cpu) / times.length) / 100 };
}

function messages(robot: string, index: number, t: number, tick: number, whole: boolean): Observation[] {
	const angle = index * 2.4 + tick * 0.002;
	const x = WIDTH / 2 + Math.cos(angle) * (5 + (index * 50) / ROBOTS);
	const y = HEIGHT / 2 + Math.sin(angle) * (3 + (index * 33) / ROBOTS);
	const here = pose({ robot, t, x, y, heading: angle + Math.PI / 2, speed: 0.8 });
	if (!whole) return [here];
	const task = tick % 20 === index % 20 ? [state({ robot, t, goal: { x: WIDTH - x, y: HEIGHT - y } })] : [];
	return [...task, here, people({ robot, t, range: 10, persons: nearest(x, y, t) })];
}

/** Persons stroll on circles of their own; each robot reports the nearest of them. */
function nearest(x: number, y: number, t: number): (readonly [number, number])[] {
	const all: (readonly [number, number, number])[] = [];
	for (let person = 0; person < PERSONS; person++) {
		const px = 2 + ((person * 37) % 116) + Math.cos(t * 0.7 + person) * 0.8;
		const py = 2 + ((person * 53) % 76) + Math.sin(t * 0.7 + person) * 0.8;
		const distance = Math.hypot(px - x, py - y);
		if (distance < 10) all.push([px, py, distance]);
	}
	return all
		.sort((a, b) => a[2] - b[2])
		.slice(0, SEEN)
		.map(([px, py]) => [px, py] as const);
}

const quantile = (sorted: readonly number[], share: number): number =>
	Math.round(sorted[Math.floor(share * (sorted.length - 1))]! * 100) / 100;
