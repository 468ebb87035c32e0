import { describe, expect, it } from 'vitest';
import { computeLabelPoint, containsPoint } from './label-point.ts';

const square = (x: number, y: number, side: number) =>
	[
		[x, y],
		[x + side, y],
		[x + side, y + side],
		[x, y + side]
	] as const;

describe('computeLabelPoint', () => {
	it('is the middle of a square', () => {
		const p = computeLabelPoint({ outer: square(10, 20, 8), holes: [] });
		expect([p.x, p.y]).toEqual([14, 24]);
	});

	it('lies inside an L, whose middle is outside', () => {
		const polygon = {
			outer: [
				[0, 0],
				[20, 0],
				[20, 4],
				[4, 4],
				[4, 20],
				[0, 20]
			],
			holes: []
		} as const;
		expect(containsPoint(polygon, 10, 10)).toBe(false);
		const p = computeLabelPoint(polygon);
		expect(containsPoint(polygon, p.x, p.y)).toBe(true);
	});

	it('keeps out of holes', () => {
		const polygon = { outer: square(0, 0, 12), holes: [square(4, 4, 4)] };
		const p = computeLabelPoint(polygon);
		expect(containsPoint(polygon, p.x, p.y)).toBe(true);
	});

	it('keeps off what stands on the floor', () => {
		const shaft = square(4, 4, 4);
		const p = computeLabelPoint({ outer: square(0, 0, 12), holes: [] }, [shaft]);
		expect(containsPoint({ outer: shaft, holes: [] }, p.x, p.y)).toBe(false);
	});
});
