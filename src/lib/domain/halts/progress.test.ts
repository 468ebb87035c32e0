import { expect, it } from 'vitest';
import fc from 'fast-check';
import { DEFAULT_HALT_RULE } from './halt-rule.ts';
import { extendTrack, progressInWindow, remainingAlong, startTrack, type ProgressTrack } from './progress.ts';

const route = [
	{ x: 0, y: 0 },
	{ x: 10, y: 0 },
	{ x: 10, y: 5 }
];

it('measures the rest of the route from the nearest point on it', () => {
	expect(remainingAlong(route, { x: 10, y: 5 }, 0, 0)).toBeCloseTo(15);
	expect(remainingAlong(route, { x: 10, y: 5 }, 4, 0)).toBeCloseTo(11);
	expect(remainingAlong(route, { x: 10, y: 5 }, 10, 3)).toBeCloseTo(2);
});

it('counts the way to the route and from its end to the goal', () => {
	expect(remainingAlong(route, { x: 10, y: 9 }, -2, 0)).toBeCloseTo(21);
	// 1 m beside the route: to the point 1.5 m on, and the 9.5 m from there.
	expect(remainingAlong(route, { x: 10, y: 5 }, 4, 1)).toBeCloseTo(Math.hypot(1.5, 1) + 9.5);
	expect(remainingAlong(route, { x: 10, y: 5 }, 11, 4)).toBeCloseTo(Math.hypot(1, 1));
});

it('trap: a robot that swerves round somebody gets on, though it leaves its route', () => {
	const straight = [
		{ x: 0, y: 0 },
		{ x: 20, y: 0 }
	];
	const before = remainingAlong(straight, straight[1]!, 5, 0);
	const beside = remainingAlong(straight, straight[1]!, 5.9, 0.9);
	expect(before - beside).toBeGreaterThan(0.6);
});

it('never grows while a robot follows its route, corners included', () => {
	fc.assert(
		fc.property(fc.double({ min: 0, max: 14.9, noNaN: true }), (s) => {
			const at = (t: number) => (t <= 10 ? { x: t, y: 0 } : { x: 10, y: t - 10 });
			const rest = ({ x, y }: { x: number; y: number }) => remainingAlong(route, route[2]!, x, y);
			expect(rest(at(s + 0.1))).toBeLessThanOrEqual(rest(at(s)) + 1e-9);
		})
	);
});

it('is the straight distance without a usable route', () => {
	expect(remainingAlong([], { x: 3, y: 4 }, 0, 0)).toBeCloseTo(5);
	expect(remainingAlong([{ x: 9, y: 9 }], { x: 3, y: 4 }, 0, 0)).toBeCloseTo(5);
	const doubled = [route[0]!, route[0]!, route[1]!, route[2]!];
	expect(remainingAlong(doubled, { x: 10, y: 5 }, 4, 0)).toBeCloseTo(11);
});

it('is never less than the straight distance to the goal', () => {
	const coordinate = fc.double({ min: -50, max: 50, noNaN: true });
	const point = fc.record({ x: coordinate, y: coordinate });
	fc.assert(
		fc.property(fc.array(point, { maxLength: 6 }), point, point, (points, goal, at) => {
			const straight = Math.hypot(goal.x - at.x, goal.y - at.y);
			expect(remainingAlong(points, goal, at.x, at.y)).toBeGreaterThanOrEqual(straight - 1e-9);
		})
	);
});

function follow(poses: [time: number, x: number][]): ProgressTrack {
	let track = startTrack({ time: poses[0]![0], x: poses[0]![1], y: 0 }, 100 - poses[0]![1]);
	for (const [time, x] of poses.slice(1)) track = extendTrack(track, { time, x, y: 0 }, 100 - x, DEFAULT_HALT_RULE, 20);
	return track;
}

it('says nothing about progress before the window is full', () => {
	expect(
		progressInWindow(
			follow([
				[0, 0],
				[1, 0],
				[2, 0]
			]),
			DEFAULT_HALT_RULE
		)
	).toBeNull();
});

it('interpolates the start of the window', () => {
	const poses = Array.from({ length: 15 }, (_, i): [number, number] => [i * 0.7, i * 0.7]);
	expect(progressInWindow(follow(poses), DEFAULT_HALT_RULE)).toBeCloseTo(6);
});

it('abstains across a gap in which the robot moved', () => {
	const poses: [number, number][] = [
		[0, 0],
		[1, 1],
		[2, 2],
		[5, 5],
		[6, 6],
		[7, 7]
	];
	expect(progressInWindow(follow(poses), DEFAULT_HALT_RULE)).toBeNull();
	const standing = poses.map(([time]): [number, number] => [time, 3]);
	expect(progressInWindow(follow(standing), DEFAULT_HALT_RULE)).toBe(0);
});

it('does not count a relocated pose as progress', () => {
	const poses = Array.from({ length: 80 }, (_, i): [number, number] => [i / 10, i < 60 ? 0 : 4]);
	expect(progressInWindow(follow(poses), DEFAULT_HALT_RULE)).toBeCloseTo(0);
});
