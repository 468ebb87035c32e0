import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Motion } from './motion.ts';

const at = (x: number, heading = 0) => ({ x, y: 0, heading });

describe('Motion', () => {
	it('glides from the old to the new position and stops there', () => {
		const motion = new Motion<string>();
		motion.update(0, [['a', at(0)]]);
		motion.update(250, [['a', at(1)]]);
		expect(motion.at('a', 250)?.x).toBe(0);
		expect(motion.at('a', 375)?.x).toBeCloseTo(0.5, 6);
		expect(motion.at('a', 9000)?.x).toBe(1);
	});

	it('never runs ahead of what was measured', () => {
		fc.assert(
			fc.property(fc.array(fc.double({ min: 0, max: 2, noNaN: true }), { minLength: 2, maxLength: 20 }), (xs) => {
				const motion = new Motion<number>();
				xs.forEach((x, i) => motion.update(i * 200, [[0, at(x)]]));
				const drawn = motion.at(0, xs.length * 200 - 130)?.x ?? NaN;
				expect(drawn).toBeGreaterThanOrEqual(Math.min(...xs) - 1e-9);
				expect(drawn).toBeLessThanOrEqual(Math.max(...xs) + 1e-9);
			})
		);
	});

	it('turns the short way through ±180°', () => {
		const motion = new Motion<string>();
		motion.update(0, [['a', at(0, 3)]]);
		motion.update(250, [['a', at(0, -3)]]);
		expect(Math.abs(motion.at('a', 375)?.heading ?? 0)).toBeCloseTo(Math.PI, 6);
	});

	it('does not draw a corrected position as a dash across the hall', () => {
		const motion = new Motion<string>();
		motion.update(0, [['a', at(0)]]);
		motion.update(250, [['a', at(30)]]);
		expect(motion.at('a', 260)?.x).toBe(30);
	});

	it('does not glide where motion is unwanted', () => {
		const motion = new Motion<string>(() => true);
		motion.update(0, [['a', at(0)]]);
		motion.update(250, [['a', at(1)]]);
		expect(motion.at('a', 251)?.x).toBe(1);
	});

	it('forgets what left the floor', () => {
		const motion = new Motion<string>();
		motion.update(0, [['a', at(0)]]);
		motion.update(250, []);
		expect(motion.at('a', 260)).toBeNull();
	});
});
