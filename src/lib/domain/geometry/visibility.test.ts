import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { computeRingArea } from './polygon.ts';
import type { Segment } from './types.ts';
import { computeVisibleRing, createStarTester } from './visibility.ts';
import { createWallIndex } from './walls.ts';

const none = createWallIndex([]);
const wall = (ax: number, ay: number, bx: number, by: number): Segment => ({ ax, ay, bx, by });
const box = [wall(-2, -1, 3, -1), wall(3, -1, 3, 2), wall(3, 2, -2, 2), wall(-2, 2, -2, -1)];

describe('visible ring', () => {
	it('is an inscribed circle of 128 corners where nothing is near', () => {
		const ring = computeVisibleRing(none, 5, 5, 10, null);
		expect(ring).toHaveLength(128);
		expect(computeRingArea(ring)).toBeCloseTo(64 * 100 * Math.sin((2 * Math.PI) / 128), 9);
	});

	it('is the room itself in a room smaller than the range', () => {
		const ring = computeVisibleRing(createWallIndex(box), 0, 0, 10, null);
		expect(computeRingArea(ring)).toBeCloseTo(15, 9);
	});

	it('has its corners exactly at wall ends', () => {
		const ring = computeVisibleRing(createWallIndex([wall(3, -1.25, 3, 1.75)]), 0, 0, 10, null);
		for (const y of [-1.25, 1.75]) {
			expect(ring.some(([cx, cy]) => Math.hypot(cx - 3, cy - y) < 1e-12)).toBe(true);
		}
	});

	it('takes the shadow of a wall out of the circle', () => {
		const sees = createStarTester(computeVisibleRing(createWallIndex([wall(3, -1, 3, 1)]), 0, 0, 10, null), 0, 0);
		expect(sees(2.9, 0)).toBe(true);
		expect(sees(3, 0.5)).toBe(true);
		expect(sees(3.1, 0)).toBe(false);
		expect(sees(6, 1.9)).toBe(false);
		expect(sees(6, 2.1)).toBe(true);
	});

	it('is cut where two walls cross between their ends', () => {
		const crossed = createWallIndex([wall(2, -2, 4, 2), wall(4, -2, 2, 2)]);
		const sees = createStarTester(computeVisibleRing(crossed, 0, 0, 10, null), 0, 0);
		expect(sees(2.95, 0)).toBe(true);
		expect(sees(3.05, 0)).toBe(false);
		expect(sees(2.3, -1)).toBe(true);
		expect(sees(2.3, 1)).toBe(true);
	});

	it('ignores walls beyond the range, edge-on, and through the sensor', () => {
		const walls = createWallIndex([wall(20, -1, 20, 1), wall(1, 0, 2, 0), wall(0, -1, 0, 1)]);
		expect(computeRingArea(computeVisibleRing(walls, 0, 0, 10, null))).toBeCloseTo(
			computeRingArea(computeVisibleRing(none, 0, 0, 10, null)),
			9
		);
	});

	it('is empty without range', () => {
		expect(computeVisibleRing(none, 0, 0, 0, null)).toEqual([]);
		expect(computeVisibleRing(none, 0, 0, NaN, null)).toEqual([]);
		expect(createStarTester([], 0, 0)(0, 0)).toBe(false);
	});
});

describe('field of view', () => {
	it('runs counter-clockwise from the first angle to the second, across ±π too', () => {
		const sees = createStarTester(computeVisibleRing(none, 0, 0, 10, [3, 3.5]), 0, 0);
		expect(sees(-5, 0)).toBe(true);
		expect(sees(-5, -1)).toBe(true);
		expect(sees(5, 0)).toBe(false);
		expect(sees(0, 5)).toBe(false);
		expect(sees(0, 0)).toBe(true);
	});

	it('is all round for a full turn and nothing for none', () => {
		expect(computeVisibleRing(none, 0, 0, 10, [-Math.PI, Math.PI])).toHaveLength(128);
		expect(computeVisibleRing(none, 0, 0, 10, [1, 1])).toEqual([]);
	});

	it('may be wider than half a turn', () => {
		const sees = createStarTester(computeVisibleRing(none, 0, 0, 10, [-2, 2]), 0, 0);
		expect(sees(-1, 5)).toBe(true);
		expect(sees(-5, 0)).toBe(false);
	});
});

it('agrees with the line of sight for any walls, crossing or not', () => {
	const at = fc.double({ min: -9, max: 9, noNaN: true });
	const walls = fc.array(fc.record({ ax: at, ay: at, bx: at, by: at }), { maxLength: 12 });
	const target = fc.tuple(at, at);
	fc.assert(
		fc.property(walls, fc.array(target, { minLength: 20, maxLength: 20 }), (segments, targets) => {
			const index = createWallIndex(segments);
			const sees = createStarTester(computeVisibleRing(index, 0, 0, 6, null), 0, 0);
			for (const [x, y] of targets) {
				const distance = Math.hypot(x, y);
				// Between the circle and its chords, and within 1 mm of a shadow's rim, the two may differ.
				if (Math.abs(distance - 6) < 0.01 || distance < 0.01) continue;
				const blocked = [-1, 0, 1].map((side) => {
					const [dx, dy] = [(-y * side * 1e-3) / distance, (x * side * 1e-3) / distance];
					return (
						index.isSightBlocked(0, 0, 1.001 * x + dx, 1.001 * y + dy) ||
						index.isSightBlocked(0, 0, 0.999 * x + dx, 0.999 * y + dy)
					);
				});
				if (blocked.every((value) => !value)) expect(sees(x, y)).toBe(distance < 6);
				const farther = index.isSightBlocked(0, 0, 0.999 * x, 0.999 * y);
				if (blocked.every(Boolean) && farther) expect(sees(x, y)).toBe(false);
			}
		})
	);
});
