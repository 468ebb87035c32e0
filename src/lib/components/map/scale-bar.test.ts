import fc from 'fast-check';
import { expect, it } from 'vitest';
import { computeScaleBar } from './scale-bar.ts';

it('picks round metres and true pixels', () => {
	expect(computeScaleBar(8, 120)).toEqual({ metres: 10, px: 80 });
	expect(computeScaleBar(6, 120)).toEqual({ metres: 20, px: 120 });
	expect(computeScaleBar(200, 120)).toEqual({ metres: 0.5, px: 100 });
});

it('always fits and always fills more than a third', () => {
	fc.assert(
		fc.property(fc.double({ min: 0.01, max: 1000, noNaN: true }), (pxPerM) => {
			const bar = computeScaleBar(pxPerM, 120);
			expect(bar?.px).toBeLessThanOrEqual(120.000001);
			expect(bar?.px).toBeGreaterThan(40);
		})
	);
});

it('draws none without a scale', () => {
	expect([computeScaleBar(0, 120), computeScaleBar(NaN, 120), computeScaleBar(-1, 120)]).toEqual([null, null, null]);
});
