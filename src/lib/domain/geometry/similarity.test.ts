import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import {
	applySimilarity,
	fitSimilarity,
	IDENTITY,
	invertSimilarity,
	rotateHeading,
	transformCovariance
} from './similarity.ts';
import type { Similarity } from './types.ts';

type Corner = readonly [number, number];
const ROOM: Corner[] = [
	[0, 0],
	[10, 0],
	[10, 6],
	[0, 6]
];
const map = (similarity: Similarity, points: readonly Corner[]): Corner[] =>
	points.map(([px, py]) => {
		const { x, y } = applySimilarity(similarity, px, py);
		return [x, y];
	});

// Method: Umeyama 1991, IEEE TPAMI 13:376 (from memory). The cases are exact by construction.
describe('fit', () => {
	it('finds an exact similarity', () => {
		const truth = { scale: 20, rotation: Math.PI / 6, tx: 300, ty: 120 };
		const fit = fitSimilarity(ROOM, map(truth, ROOM));
		expect(fit.scale).toBeCloseTo(20, 10);
		expect(fit.rotation).toBeCloseTo(Math.PI / 6, 12);
		expect([fit.tx, fit.ty].map((value) => value.toFixed(8))).toEqual(['300.00000000', '120.00000000']);
		expect(fit.maxResidual).toBeLessThan(1e-9);
	});

	it('finds whatever similarity moved the points', () => {
		const truth = fc.record({
			scale: fc.double({ min: 0.1, max: 50, noNaN: true }),
			rotation: fc.double({ min: -3, max: 3, noNaN: true }),
			tx: fc.double({ min: -500, max: 500, noNaN: true }),
			ty: fc.double({ min: -500, max: 500, noNaN: true })
		});
		fc.assert(
			fc.property(truth, (similarity) => {
				const fit = fitSimilarity(ROOM, map(similarity, ROOM));
				expect(fit.scale).toBeCloseTo(similarity.scale, 8);
				expect(fit.rotation).toBeCloseTo(similarity.rotation, 8);
			})
		);
	});

	it('keeps the scale at 1 when told so', () => {
		expect(fitSimilarity(ROOM, map({ ...IDENTITY, scale: 3 }, ROOM), { estimateScale: false }).scale).toBe(1);
	});

	it('trusts heavier points more', () => {
		const target: Corner[] = [[1, 0], ...ROOM.slice(1)];
		const light = fitSimilarity(ROOM, target, { weights: [0.001, 1, 1, 1] });
		const even = fitSimilarity(ROOM, target);
		expect(light.distances[1]).toBeLessThan(even.distances[1]!);
	});
});

describe('what naive code gets wrong', () => {
	const yDown = ROOM.map(([x, y]): Corner => [50 + 20 * x, 400 - 20 * y]);

	it('image y points down: no proper fit, and no silent mirroring', () => {
		const plain = fitSimilarity(ROOM, yDown);
		expect(plain.mirrored).toBe(false);
		expect(plain.rms).toBeGreaterThan(50);
	});

	it('image y points down: mirrors only where allowed, or flip first', () => {
		const mirrored = fitSimilarity(ROOM, yDown, { allowReflection: true });
		expect(mirrored.mirrored).toBe(true);
		expect(mirrored.rms).toBeLessThan(1e-9);
		const flipped = fitSimilarity(
			ROOM,
			yDown.map(([x, y]) => [x, -y])
		);
		expect(flipped.mirrored).toBe(false);
		expect(flipped.rms).toBeLessThan(1e-9);
	});

	it('two points say nothing about quality: residual 0, no sigma, no leave-one-out', () => {
		const fit = fitSimilarity(
			[
				[0, 0],
				[10, 0]
			],
			[
				[100, 50],
				[100, 250]
			]
		);
		expect(fit.rms).toBeCloseTo(0, 9);
		expect(fit.sigma).toBeNull();
		expect(fit.leaveOneOut).toBeNull();
	});

	it('leave-one-out exposes the outlier that its own residual hides', () => {
		const target = map({ ...IDENTITY, rotation: 0.2 }, ROOM).map(([x, y], i): Corner =>
			i === 2 ? [x + 2, y] : [x, y]
		);
		const fit = fitSimilarity(ROOM, target);
		expect(fit.leaveOneOut![2]).toBeGreaterThan(1.5 * fit.distances[2]!);
		expect(fit.leaveOneOut![2]).toBeCloseTo(2, 9);
	});

	it('coincident control points are refused', () => {
		const spot: Corner[] = [
			[2.1, 2.1],
			[2.1, 2.1],
			[2.1, 2.1]
		];
		expect(() => fitSimilarity(spot, ROOM.slice(0, 3))).toThrow(Failure);
		expect(() => fitSimilarity(ROOM.slice(0, 3), spot)).toThrow('one spot');
		expect(() => fitSimilarity([[1, 1]], [[2, 2]])).toThrow(Failure);
	});

	it('collinear points still fix the rotation', () => {
		const line: Corner[] = [
			[0, 0],
			[4, 0],
			[9, 0]
		];
		expect(fitSimilarity(line, map({ ...IDENTITY, rotation: 1 }, line)).rotation).toBeCloseTo(1, 12);
	});

	it('headings turn and covariances scale by s² and rotate', () => {
		const quarter = { scale: 2, rotation: Math.PI / 2, tx: 1, ty: 1 };
		expect(rotateHeading(quarter, 3)).toBeCloseTo(3 - 1.5 * Math.PI, 12);
		const [xx, xy, yy] = transformCovariance(quarter, [0.04, 0.01, 0.02]);
		expect(xx).toBeCloseTo(0.08, 12);
		expect(xy).toBeCloseTo(-0.04, 12);
		expect(yy).toBeCloseTo(0.16, 12);
	});

	it('large coordinates are centred first', () => {
		const far = ROOM.map(([x, y]): Corner => [x + 500_000, y + 5_400_000]);
		const fit = fitSimilarity(far, ROOM);
		expect(fit.scale).toBeCloseTo(1, 12);
		expect(fit.rms).toBeLessThan(1e-8);
	});

	it('refuses numbers that are none, lists of unlike length and negative weights', () => {
		expect(() =>
			fitSimilarity(
				[
					[NaN, 0],
					[1, 1]
				],
				ROOM.slice(0, 2)
			)
		).toThrow(Failure);
		expect(() => fitSimilarity(ROOM, ROOM.slice(1))).toThrow(Failure);
		expect(() => fitSimilarity(ROOM, ROOM, { weights: [1, 1, 1, -1] })).toThrow(Failure);
	});
});

it('leads back by its inverse', () => {
	const there = { scale: 0.98, rotation: 2.5, tx: 40, ty: -7 };
	const number = fc.double({ min: -100, max: 100, noNaN: true });
	fc.assert(
		fc.property(number, number, (x, y) => {
			const mapped = applySimilarity(there, x, y);
			const back = applySimilarity(invertSimilarity(there), mapped.x, mapped.y);
			expect(back.x).toBeCloseTo(x, 9);
			expect(back.y).toBeCloseTo(y, 9);
		})
	);
});
