import { expect, it } from 'vitest';
import { FLOOR, people, pose, robotNamed, state, T0 } from '../../../../tests/support/room-with-robot.ts';
import type { Floor } from '../floor.ts';
import { IDENTITY } from '../geometry/similarity.ts';
import type { EngineEvent } from './events.ts';
import type { Observation } from './observation.ts';
import { DEFAULT_RULES } from './rules.ts';
import { createVenueContext, createVenueState, stepVenue } from './venue-engine.ts';

const UPSTAIRS: Floor = { ...FLOOR, key: 'upstairs', maps: { 'upstairs-map': IDENTITY } };
const context = createVenueContext('test', [FLOOR, UPSTAIRS], ['t1', 't2'].map(robotNamed), DEFAULT_RULES);

function run(ticks: readonly Observation[][]) {
	let current = createVenueState(context);
	const events: EngineEvent[] = [];
	let frames = stepVenue(context, current, [], T0 - 1).frames;
	ticks.forEach((heard, index) => {
		const step = stepVenue(context, current, heard, T0 + index / 10);
		current = step.state;
		events.push(...step.events);
		frames = step.frames;
	});
	const robotsOn = (floor: string) =>
		frames.find((frame) => frame.floor === floor)!.robots.map(({ view }) => view.robot.key);
	return { current, events, frames, robotsOn };
}

it('takes a robot along when it turns up in another floor’s map, with its clock and what it last said', () => {
	const { robotsOn, current } = run([
		[state({ t: T0, ahead: 50 }), pose({ t: T0, x: 5, y: 5, ahead: 50 })],
		[pose({ t: T0 + 0.1, x: 3, y: 4, ahead: 50, map: 'upstairs-map' })]
	]);
	expect(robotsOn('test-floor')).toEqual([]);
	expect(robotsOn('upstairs')).toEqual(['t1']);
	const view = current.floors.get('upstairs')!.robots.get('t1')!;
	expect(view.state?.software).toBe('1.0.0');
	expect(view.offset).toBeCloseTo(50, 1);
	expect(view.poses).toHaveLength(1);
});

it('remembers what a robot said before it said where it is', () => {
	const { current } = run([[state({ t: T0 })], [], [pose({ t: T0 + 0.2, x: 5, y: 5 })]]);
	expect(current.floors.get('test-floor')!.robots.get('t1')?.task?.id).toBe('job-1');
});

it('drops people seen by a robot nobody has placed yet, and says nothing about it', () => {
	const { frames, events } = run([[people({ t: T0, persons: [[5, 5]] })]]);
	expect(frames.every(({ persons }) => persons.length === 0)).toBe(true);
	expect(events).toEqual([]);
});

it('leaves a robot where it was when it names a map no floor knows', () => {
	const { robotsOn, events } = run([
		[pose({ t: T0, x: 5, y: 5 })],
		[pose({ t: T0 + 0.1, x: 5, y: 5, map: 'nowhere' })]
	]);
	expect(robotsOn('test-floor')).toEqual(['t1']);
	expect(events).toMatchObject([{ type: 'rejected', reason: 'unknown_map' }]);
});

it('keeps people of two floors apart though they stand at the same place', () => {
	const crowd = [[5, 5]] as const;
	const heard = (t: number): Observation[] => [
		pose({ t, x: 2, y: 2 }),
		people({ t, persons: crowd }),
		pose({ robot: 't2', t, x: 2, y: 2, map: 'upstairs-map' }),
		{ ...people({ robot: 't2', t, persons: crowd }), map: 'upstairs-map' }
	];
	const { frames } = run([0, 0.1, 0.2, 0.3, 0.4, 0.5].map((t) => heard(T0 + t)));
	expect(frames.map(({ persons }) => persons.length)).toEqual([1, 1]);
});
