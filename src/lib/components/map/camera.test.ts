import fc from 'fast-check';
import { expect, it } from 'vitest';
import { between, transformOf, viewOf } from './camera.ts';
import { screenX, screenY } from './projection.ts';

const metre = fc.double({ min: -500, max: 500, noNaN: true });
const anyView = fc.record({
	centre: fc.record({ x: metre, y: metre }),
	pxPerM: fc.double({ min: 0.2, max: 400, noNaN: true }),
	width: fc.integer({ min: 1, max: 4000 }),
	height: fc.integer({ min: 1, max: 4000 })
});

it('the gesture library and the drawing put a point on the same pixel', () => {
	fc.assert(
		fc.property(anyView, metre, metre, (view, x, y) => {
			const [px, py] = transformOf(view).apply([x, -y]);
			expect(px).toBeCloseTo(screenX(view, x), 4);
			expect(py).toBeCloseTo(screenY(view, y), 4);
		})
	);
});

it('a view survives the way there and back', () => {
	fc.assert(
		fc.property(anyView, (view) => {
			const back = viewOf(transformOf(view), view);
			expect(back.centre.x).toBeCloseTo(view.centre.x, 6);
			expect(back.centre.y).toBeCloseTo(view.centre.y, 6);
			expect(back.pxPerM).toBe(view.pxPerM);
		})
	);
});

it('a glide starts where the view is and ends where it should', () => {
	fc.assert(
		fc.property(anyView, anyView, (from, to) => {
			expect(between(from, to, 0).centre.y).toBeCloseTo(from.centre.y, 6);
			expect(between(from, to, 1).pxPerM).toBeCloseTo(to.pxPerM, 6);
			expect(between(from, to, 1).centre.x).toBeCloseTo(to.centre.x, 6);
		})
	);
});
