import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { boundsOf, fitView, floorAt, isInSight, screenX, screenY } from './projection.ts';

it('a pixel and its floor point agree, y pointing up', () => {
	const view = { centre: { x: 30, y: 20 }, pxPerM: 8, width: 800, height: 600 };
	expect([screenX(view, 30), screenY(view, 20)]).toEqual([400, 300]);
	expect(screenY(view, 21)).toBe(292);
	expect(floorAt(view, screenX(view, 12.5), screenY(view, 44))).toEqual({ x: 12.5, y: 44 });
});

describe('fitView', () => {
	const bounds = { minX: 0, minY: -5, maxX: 120, maxY: 80 };
	const margins = { top: 50, right: 30, bottom: 150, left: 20 };

	it('shows all of the floor between the margins and touches two of them', () => {
		fc.assert(
			fc.property(fc.integer({ min: 300, max: 2500 }), fc.integer({ min: 300, max: 2500 }), (width, height) => {
				const view = fitView(bounds, { width, height }, margins, 1000);
				const left = screenX(view, bounds.minX) - margins.left;
				const right = width - margins.right - screenX(view, bounds.maxX);
				const top = screenY(view, bounds.maxY) - margins.top;
				const bottom = height - margins.bottom - screenY(view, bounds.minY);
				expect(left).toBeCloseTo(right, 6);
				expect(top).toBeCloseTo(bottom, 6);
				expect(Math.min(left, top)).toBeCloseTo(0, 6);
			})
		);
	});

	it('does not blow up a small room', () => {
		const view = fitView({ minX: 0, minY: 0, maxX: 2, maxY: 2 }, { width: 1000, height: 1000 }, margins, 60);
		expect(view.pxPerM).toBe(60);
	});

	it('still shows the floor where the margins leave no room', () => {
		expect(fitView(bounds, { width: 200, height: 150 }, margins, 60).pxPerM).toBeCloseTo(200 / 120, 6);
	});
});

it('what lies under a margin is not in sight', () => {
	const view = { centre: { x: 0, y: 0 }, pxPerM: 10, width: 400, height: 400 };
	const margins = { top: 0, right: 150, bottom: 0, left: 0 };
	expect([isInSight(view, margins, 0, 0), isInSight(view, margins, 10, 0)]).toEqual([true, false]);
});

it('boundsOf finds the box of a ring', () => {
	expect(
		boundsOf([
			[3, 1],
			[-2, 7],
			[5, 4]
		])
	).toEqual({ minX: -2, minY: 1, maxX: 5, maxY: 7 });
});
