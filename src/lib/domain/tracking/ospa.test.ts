import fc from 'fast-check';
import { expect, it } from 'vitest';
import { computeOspa } from './ospa.ts';

const points = fc.array(
	fc.record({ x: fc.double({ min: -9, max: 9, noNaN: true }), y: fc.double({ min: -9, max: 9, noNaN: true }) }),
	{ maxLength: 6 }
);

it('is 0 between two empty sets and the cutoff against an empty one (Schuhmacher, Vo & Vo 2008)', () => {
	expect(computeOspa([], [], 1, 2).distance).toBe(0);
	expect(computeOspa([{ x: 1, y: 1 }], [], 0.5, 2)).toEqual({ distance: 0.5, localisation: 0, cardinality: 0.5 });
});

it('is the plain distance for one near point, and the cutoff for one far away', () => {
	expect(computeOspa([{ x: 0, y: 0 }], [{ x: 0.3, y: 0.4 }], 1, 1).distance).toBeCloseTo(0.5, 12);
	expect(computeOspa([{ x: 0, y: 0 }], [{ x: 3, y: 4 }], 1, 1).distance).toBe(1);
});

it('is a metric: the same both ways, 0 only for equal sets, never above the cutoff, no short cuts', () => {
	fc.assert(
		fc.property(points, points, points, (a, b, c) => {
			const d = (p: typeof a, q: typeof a) => computeOspa(p, q, 2, 2).distance;
			expect(d(a, b)).toBeCloseTo(d(b, a), 9);
			expect(d(a, a)).toBe(0);
			expect(d(a, b)).toBeLessThanOrEqual(2 + 1e-12);
			expect(d(a, c)).toBeLessThanOrEqual(d(a, b) + d(b, c) + 1e-9);
		})
	);
});
