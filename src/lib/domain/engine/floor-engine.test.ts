import { describe, expect, it } from 'vitest';
import { FLOOR, people, pose, robotNamed, state, T0 } from '../../../../tests/support/room-with-robot.ts';
import type { Floor } from '../floor.ts';
import type { EngineEvent } from './events.ts';
import { createFloorState, stepFloor, type FloorContext, type FloorState } from './floor-engine.ts';
import { createFloorModel } from './floor-model.ts';
import type { Frame } from './frame.ts';
import type { Observation } from './observation.ts';
import { DEFAULT_RULES } from './rules.ts';

const context = (floor: Floor = FLOOR): FloorContext => ({
	venue: 'test',
	model: createFloorModel(floor),
	rules: DEFAULT_RULES,
	robots: new Map(['t1', 't2', 't3'].map((key) => [key, robotNamed(key)]))
});

type Script = (t: number) => Observation[];

/** Steps at 10 Hz from T0 for `seconds`; `script` says what is heard in the tick that ends at T0 + t. */
function run(script: Script, seconds: number, at: FloorContext = context()) {
	let current: FloorState = createFloorState(at);
	const events: Seen[] = [];
	const frames: Frame[] = [];
	for (let tick = 0; tick <= seconds * 10; tick++) {
		const t = tick / 10;
		const heard: Observation[] = tick === 0 ? [{ kind: 'listening', receivedAt: T0 - 60, listening: true }] : [];
		heard.push(...script(t));
		const step = stepFloor(at, current, heard, T0 + t + 0.05);
		current = step.state;
		events.push(...step.events.map((event) => ({ ...event, seenAt: t })));
		frames.push(step.frame);
	}
	return { events, frames, last: frames.at(-1)!, state: current };
}

const everySecond = (t: number) => Math.abs(t - Math.round(t)) < 1e-9;

/** Drives along y = 5 at 1 m/s until `stopAt` metres, then stands. */
const drive =
	(stopAt: number, persons: readonly (readonly [number, number])[] = []): Script =>
	(t) => {
		const x = Math.min(1 + t, stopAt);
		const heard: Observation[] = [
			pose({ t: T0 + t, x, y: 5, speed: x < stopAt ? 1 : 0 }),
			people({ t: T0 + t, persons })
		];
		return everySecond(t) ? [state({ t: T0 + t }), ...heard] : heard;
	};

type Seen = EngineEvent & { readonly seenAt: number };
type Start = Extract<EngineEvent, { type: 'halt_started' }> & { readonly seenAt: number };

const starts = (events: readonly Seen[]): Start[] =>
	events.filter((event): event is Start => event.type === 'halt_started');

describe('halts', () => {
	/** A wall of people from side to side. */
	const crowd = [0.5, 1.2, 1.9, 2.6, 3.3, 4, 4.7, 5.4, 6.1, 6.8, 7.5, 8.2, 8.9, 9.6].map((y) => [8, y] as const);

	it('a robot stopped by a wall of people freezes, packed, with the onset where it stopped and within 10 s', () => {
		const { events } = run(drive(7, crowd), 20);
		const [start] = starts(events);
		expect(start).toMatchObject({ halt: { kind: 'freeze', robot: 't1', zone: 'west' } });
		expect(start!.halt.onset - T0).toBeGreaterThan(5.4);
		expect(start!.halt.onset - T0).toBeLessThan(6.6);
		expect(start!.seenAt - 6).toBeLessThan(10);
		expect(start!.halt.at?.roomAlone).toBeLessThan(0.25);
		expect(start!.halt.before?.density).toBeGreaterThan(0.1);
	});

	it('a robot stopped with nobody about stalls, and there was room: open', () => {
		const { events } = run(drive(7), 20);
		expect(starts(events)).toHaveLength(1);
		expect(starts(events)[0]).toMatchObject({ halt: { kind: 'stall', verdict: 'open' } });
	});

	it('a robot that could see next to nothing gets the verdict unseen, never open', () => {
		const blind: Script = (t) => drive(7)(t).map((said) => (said.kind === 'people' ? { ...said, range: 1 } : said));
		expect(starts(run(blind, 20).events)[0]).toMatchObject({ halt: { verdict: 'unseen' } });
	});

	it('a robot on its way raises nothing', () => {
		expect(
			starts(
				run(
					drive(
						19,
						crowd.map(([x, y]) => [x + 30, y] as const)
					),
					17
				).events
			)
		).toEqual([]);
	});

	it('ends when the robot gets on again', () => {
		const script: Script = (t) => (t < 18 ? drive(7)(t) : [pose({ t: T0 + t, x: 7 + (t - 18), y: 5, speed: 1 })]);
		const { events } = run(script, 22);
		expect(events.filter(({ type }) => type === 'halt_ended')).toHaveLength(1);
	});

	it('a robot that falls silent is silent, from its last pose', () => {
		const script: Script = (t) => (t <= 3 ? drive(19)(t) : []);
		const { events, last } = run(script, 12);
		expect(starts(events)[0]).toMatchObject({ halt: { kind: 'silent' } });
		expect(starts(events)[0]!.halt.onset - T0).toBeCloseTo(3, 1);
		expect(last.robots[0]?.condition).toBe('silent');
	});

	it('nobody is called silent while no message can reach us', () => {
		const script: Script = (t) => {
			if (t <= 3) return drive(19)(t);
			return t === 3.1 ? [{ kind: 'listening', receivedAt: T0 + t, listening: false }] : [];
		};
		expect(starts(run(script, 12).events)).toEqual([]);
	});

	it('three robots stopped by one thing share a cause group', () => {
		const one = drive(7, crowd);
		const script: Script = (t) =>
			one(t).flatMap((said) =>
				['t1', 't2', 't3'].map((robot, lane) =>
					said.kind === 'listening' ? said : { ...said, robot, ...(said.kind === 'pose' ? { y: 3 + 2 * lane } : {}) }
				)
			);
		const { events } = run(script, 20);
		const groups = new Set(starts(events).map(({ halt }) => halt.causeGroup));
		expect(starts(events)).toHaveLength(3);
		expect(groups.size).toBe(1);
	});

	it('goes on with an open halt under the same name after a restart', () => {
		const at = context();
		const before = run(drive(7), 20, at);
		const open = starts(before.events)[0]!.halt;
		let current = createFloorState(at, [open]);
		const first = stepFloor(at, current, [{ kind: 'listening', receivedAt: T0, listening: true }], T0 + 60);
		expect(first.frame.halts).toEqual([open]);
		current = first.state;
		const events: EngineEvent[] = [];
		for (let t = 60.1; t < 75; t += 0.1) {
			const heard = [state({ t: T0 + t }), pose({ t: T0 + t, x: 7, y: 5 })];
			const step = stepFloor(at, current, heard, T0 + t);
			current = step.state;
			events.push(...step.events);
		}
		expect(events.filter(({ type }) => type.startsWith('halt'))).toEqual([]);
		expect(current.robots.get('t1')?.open?.incident).toBe(open.incident);
	});
});

describe('people and density', () => {
	it('counts a person seen by three robots once', () => {
		const persons = [
			[5, 5],
			[6, 7],
			[12, 3]
		] as const;
		const script: Script = (t) =>
			['t1', 't2', 't3'].flatMap((robot, index) => [
				pose({ robot, t: T0 + t, x: 2 + 5 * index, y: 2 }),
				people({ robot, t: T0 + t, persons: persons.map(([x, y]) => [x + 0.03 * index, y - 0.02 * index] as const) })
			]);
		const { last } = run(script, 3);
		expect(last.persons).toHaveLength(3);
		expect(last.persons.every(({ seenBy }) => seenBy === 3)).toBe(true);
	});

	it('gives the exact classic density of a zone that was seen whole', () => {
		const persons = Array.from({ length: 10 }, (_, i) => [1 + 0.8 * i, 2 + 0.6 * i] as const);
		const { last } = run((t) => [pose({ t: T0 + t, x: 10, y: 5 }), people({ t: T0 + t, persons, sd: 0.001 })], 2);
		const west = last.zones.find(({ key }) => key === 'west')!;
		expect(west.coverage).toBe(1);
		expect(west.classic).toBeCloseTo(10 / 100, 9);
		expect(west.density).toBeCloseTo(10 / 100, 2);
		expect(last.zones.find(({ key }) => key === 'east')).toMatchObject({ density: 0, classic: 0, persons: 0 });
	});

	it('says not measured, not zero, of a zone nobody looks at', () => {
		const { last } = run((t) => [pose({ t: T0 + t, x: 2, y: 5 }), people({ t: T0 + t, persons: [], range: 4 })], 2);
		expect(last.zones.find(({ key }) => key === 'east')).toMatchObject({ density: null, classic: null, coverage: 0 });
		expect(last.field?.values.at(-1)).toBeNaN();
	});

	it('forgets what was seen two seconds ago', () => {
		const script: Script = (t) =>
			t < 2 ? [pose({ t: T0 + t, x: 10, y: 5 }), people({ t: T0 + t, persons: [[3, 3]] })] : [];
		const { last, frames } = run(script, 6);
		expect(frames[15]!.coverage).toBeGreaterThan(0.99);
		expect(last.coverage).toBe(0);
		expect(last.persons).toEqual([]);
	});

	it('keeps nothing about people in a private zone', () => {
		const [west, east] = FLOOR.zones as [Floor['zones'][0], Floor['zones'][0]];
		const hidden = { ...FLOOR, zones: [{ ...west, private: true }, east] };
		const script: Script = (t) => [
			pose({ t: T0 + t, x: 10, y: 5 }),
			people({
				t: T0 + t,
				persons: [
					[3, 3],
					[15, 5]
				]
			})
		];
		const { last, state: after } = run(script, 3, context(hidden));
		expect(last.persons.map(({ x }) => Math.round(x))).toEqual([15]);
		expect(last.zones.find(({ key }) => key === 'west')).toMatchObject({ density: null, persons: 0, coverage: 0 });
		expect(after.tracker.tracks).toHaveLength(1);
	});
});

describe('time and maps', () => {
	it('places a robot whose clock is an hour ahead where it is now', () => {
		const { last, events } = run((t) => [pose({ t: T0 + t, x: 5, y: 5, ahead: 3600 })], 2);
		expect(events).toEqual([]);
		expect(last.robots[0]?.view.offset).toBeCloseTo(3600, 1);
		expect(last.time - last.robots[0]!.pose!.time).toBeLessThan(0.3);
	});

	it('rejects a single stamp from the future and one from the past, and goes on', () => {
		const script: Script = (t) => {
			const ahead = t === 5 ? 120 : t === 6 ? -120 : 0;
			return [pose({ t: T0 + t, x: 5, y: 5, ahead })];
		};
		const { events, last } = run(script, 8);
		expect(events.map((event) => event.type === 'rejected' && event.reason)).toEqual(['future', 'past']);
		expect(last.robots[0]?.condition).not.toBe('silent');
	});

	it('rejects positions in a map no floor knows', () => {
		const { events } = run((t) => (t === 1 ? [pose({ t: T0 + t, x: 5, y: 5, map: 'elsewhere' })] : []), 2);
		expect(events).toMatchObject([{ type: 'rejected', reason: 'unknown_map' }]);
	});

	it('is a pure fold: the same input gives the same, and the state passed in is left as it was', () => {
		const at = context();
		const crowdNear = [[8, 5]] as const;
		const { state: reached } = run(drive(7, crowdNear), 4, at);
		const frozen = JSON.stringify([
			...reached.seenAt.slice(0, 50),
			...reached.tracker.tracks.map(({ x, y }) => [x, y])
		]);
		const heard = drive(7, crowdNear)(4.1);
		const once = stepFloor(at, reached, heard, T0 + 4.15);
		const again = stepFloor(at, reached, heard, T0 + 4.15);
		expect(again.frame).toEqual(once.frame);
		expect(JSON.stringify([...reached.seenAt.slice(0, 50), ...reached.tracker.tracks.map(({ x, y }) => [x, y])])).toBe(
			frozen
		);
	});
});
