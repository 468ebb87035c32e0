import { describe, expect, it } from 'vitest';
import { createWallIndex } from './walls.ts';

const wall = (ax: number, ay: number, bx: number, by: number) => ({ ax, ay, bx, by });

describe('line of sight', () => {
	const index = createWallIndex([wall(2, -1, 2, 1)]);

	it('is blocked by a wall across it, from either side', () => {
		expect(index.isSightBlocked(0, 0, 4, 0)).toBe(true);
		expect(index.isSightBlocked(4, 0, 0, 0)).toBe(true);
	});

	it('is free before, beside and behind the wall', () => {
		expect(index.isSightBlocked(0, 0, 1.9, 0)).toBe(false);
		expect(index.isSightBlocked(0, 2, 4, 2)).toBe(false);
		expect(index.isSightBlocked(3, 0, 9, 0)).toBe(false);
	});

	it('reaches a person who stands at the wall, and starts at one', () => {
		expect(index.isSightBlocked(0, 0, 2, 0)).toBe(false);
		expect(index.isSightBlocked(2, 0, 0, 0)).toBe(false);
	});

	it('is not blocked by a grazed end, nor by a wall along it', () => {
		expect(index.isSightBlocked(0, 1, 4, 1)).toBe(false);
		expect(index.isSightBlocked(0, 1 - 1e-8, 4, 1 - 1e-8)).toBe(true);
		expect(createWallIndex([wall(1, 0, 3, 0)]).isSightBlocked(0, 0, 4, 0)).toBe(false);
	});

	it('does not leak through the joint of two walls', () => {
		const joined = createWallIndex([wall(2, -1, 2, 0), wall(2, 0, 2, 1)]);
		expect(joined.isSightBlocked(0, 0, 4, 0)).toBe(true);
	});

	it('passes the corner of a pillar it only grazes, on both sides', () => {
		const pillar = [wall(2, 0, 3, 1), wall(3, 1, 2, 2), wall(2, 2, 1, 1), wall(1, 1, 2, 0)];
		const index = createWallIndex(pillar);
		expect(index.isSightBlocked(0, 0, 4, 0)).toBe(false);
		expect(index.isSightBlocked(0, 2, 4, 2)).toBe(false);
		expect(index.isSightBlocked(0, 1, 4, 1)).toBe(true);
	});

	it('has no length from a point to itself', () => {
		expect(index.isSightBlocked(2, 0, 2, 0)).toBe(false);
	});
});

it('finds walls by their nearest point', () => {
	const index = createWallIndex([wall(0, 0, 10, 10), wall(5, 0, 9, 0)]);
	expect(index.near(5, 5, 0.1)).toEqual([wall(0, 0, 10, 10)]);
	// The box of the first wall holds this point; the wall itself is 2.8 m away.
	expect(index.near(7, 3, 1)).toEqual([]);
	expect(index.near(5, 1, 10)).toHaveLength(2);
});

it('works without walls', () => {
	const none = createWallIndex([]);
	expect(none.isSightBlocked(0, 0, 1, 1)).toBe(false);
	expect(none.near(0, 0, 100)).toEqual([]);
});
