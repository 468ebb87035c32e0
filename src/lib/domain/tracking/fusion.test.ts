import { describe, expect, it } from 'vitest';
import { fuseCorrelated, fuseIndependent, fuseReports, leastOver, type PositionEstimate } from './fusion.ts';
import { chiSquareGate } from './gating.ts';

const at = (x: number, y: number, xx: number, yy = xx, xy = 0): PositionEstimate => ({
	x,
	y,
	covariance: { xx, xy, yy }
});

describe('reports of two robots', () => {
	// Case FUSE-1 of the reference methods, section 6.
	const a = [at(2, 1, 0.02), at(4.1, 1, 0.04, 0.02), at(6, 3, 0.1, 0.1, 0.05)];
	const b = [at(2.2, 1.1, 0.03), at(4.9, 1, 0.09, 0.01), at(6.7, 3.7, 0.1, 0.1, 0.05), at(9, 0, 0.02)];
	const gate = chiSquareGate(0.99, 2);

	it('trap: a gate in metres finds six people where there are four', () => {
		const within = b.filter((q) => a.some((p) => Math.hypot(p.x - q.x, p.y - q.y) < 0.5));
		expect(a.length + b.length - within.length).toBe(6);
		expect(fuseReports(a, b, gate).persons).toBe(4);
	});

	it('puts the fused person nearer the surer report', () => {
		const { pairs, fused } = fuseReports(a, b, gate);
		expect(pairs).toEqual([
			[0, 0],
			[1, 1],
			[2, 2]
		]);
		expect(fused[0]!.x).toBeCloseTo(2.08, 12);
		expect(fused[0]!.covariance.xx).toBeCloseTo(0.012, 12);
	});

	it('pairs reports farther apart when the maps may disagree by more', () => {
		const [p, q] = [[at(0, 0, 0.01)], [at(0.5, 0, 0.01)]];
		expect(fuseReports(p, q, gate).persons).toBe(2);
		expect(fuseReports(p, q, gate, { xx: 0.02, xy: 0, yy: 0.02 }).persons).toBe(1);
	});

	it('counts everybody when one robot sees nobody', () => {
		expect(fuseReports([], b, gate)).toMatchObject({ distances: [], pairs: [], fused: [], persons: 4 });
	});
});

describe('tracks that share a past', () => {
	it('trap: fusing an estimate with itself makes it no surer (covariance intersection), unlike information fusion', () => {
		const one = at(1, 2, 0.04, 0.09, 0.01);
		expect(fuseIndependent(one, one).covariance.xx).toBeCloseTo(0.02, 12);
		const same = fuseCorrelated(one, one);
		expect(same.covariance.xx).toBeCloseTo(0.04, 12);
		expect(same.x).toBeCloseTo(1, 12);
	});

	it('is as sure as the surer of two round estimates', () => {
		expect(fuseCorrelated(at(0, 0, 0.01), at(1, 0, 0.25)).covariance.xx).toBeCloseTo(0.01, 6);
	});

	it('takes from each what it knows best', () => {
		const fused = fuseCorrelated(at(0, 0, 1, 0.01), at(0, 0, 0.01, 1));
		expect(fused.covariance.xx).toBeCloseTo(fused.covariance.yy, 5);
		expect(fused.covariance.xx).toBeLessThan(0.03);
	});
});

it('finds the least value inside and at the ends', () => {
	expect(leastOver((w) => (w - 0.3) ** 2)).toBeCloseTo(0.3, 5);
	expect(leastOver((w) => w)).toBe(0);
	expect(leastOver((w) => -w)).toBe(1);
});
