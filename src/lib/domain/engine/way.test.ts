import { expect, it } from 'vitest';
import { directionAlong } from './way.ts';

const corner = [
	{ x: 0, y: 0 },
	{ x: 10, y: 0 },
	{ x: 10, y: 10 }
];

it('points along the leg the robot is on', () => {
	expect(directionAlong(corner, corner[2]!, 3, 0, 1.5)).toBeCloseTo(0, 12);
});

it('turns with the route before the corner is reached', () => {
	expect(directionAlong(corner, corner[2]!, 9.5, 0, 1.5)).toBeCloseTo(Math.atan2(1, 0.5), 12);
});

it('leads back to the route from beside it', () => {
	expect(directionAlong(corner, corner[2]!, 3, -1.5, 1.5)).toBeCloseTo(Math.PI / 4, 12);
});

it('ends at the last point when less than the look-ahead is left', () => {
	expect(directionAlong(corner, corner[2]!, 10, 9, 1.5)).toBeCloseTo(Math.PI / 2, 12);
});

it('goes straight to the goal without a route, and nowhere on the goal itself', () => {
	expect(directionAlong(null, { x: 1, y: 1 }, 0, 0, 1.5)).toBeCloseTo(Math.PI / 4, 12);
	expect(directionAlong(null, { x: 1, y: 1 }, 1, 1, 1.5)).toBeNull();
});
