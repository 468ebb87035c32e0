import { expect, it } from 'vitest';
import { Trails } from './trail.ts';

it('holds 20 s and no more', () => {
	const trails = new Trails();
	for (let s = 0; s <= 60; s++) trails.note('a', s, 0, s * 1000);
	expect(trails.of('a')[0]?.x).toBe(40);
	expect(trails.of('a').at(-1)?.x).toBe(60);
});

it('adds nothing while a robot stands, and still fades', () => {
	const trails = new Trails();
	for (let s = 0; s <= 30; s++) trails.note('a', 0, 0, s * 1000);
	expect(trails.of('a').length).toBeLessThanOrEqual(1);
});

it('breaks where the position was corrected', () => {
	const trails = new Trails();
	trails.note('a', 0, 0, 0);
	trails.note('a', 1, 0, 1000);
	trails.note('a', 50, 0, 2000);
	expect(trails.of('a').map(({ x }) => x)).toEqual([50]);
});
