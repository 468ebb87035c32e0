import { describe, expect, it } from 'vitest';
import fc from 'fast-check';
fc.configureGlobal({ numRuns: 1500 });
import { computeGridProgress, findLeastViolation } from './orca-solve.ts';
import { computeOrcaRoom, type OrcaAgent, type OrcaQuery } from './orca.ts';

const agent = (x: number, y: number, vx = 0, vy = 0, radius = 0.25): OrcaAgent => ({ x, y, vx, vy, radius });

const ask = (persons: OrcaAgent[], changes: Partial<OrcaQuery> = {}) =>
	computeOrcaRoom({
		robot: agent(0, 0, 0, 0, 0.3),
		persons,
		preferredVelocity: { x: 1, y: 0 },
		maxSpeed: 1.5,
		horizon: 3,
		step: 0.25,
		share: 1,
		...changes
	});

const ring = (count: number, radius: number, outward: number) =>
	Array.from({ length: count }, (_, i) => {
		const at = 0.1 + (2 * Math.PI * i) / count;
		return agent(radius * Math.cos(at), radius * Math.sin(at), outward * Math.cos(at), outward * Math.sin(at));
	});

it('gives a robot at rest before a standing person α(D − R)/τ (closed form, van den Berg et al. 2011)', () => {
	for (const distance of [1, 2, 3]) {
		for (const share of [0.5, 1]) {
			expect(ask([agent(distance, 0)], { share }).progress).toBeCloseTo((share * (distance - 0.55)) / 3, 12);
		}
	}
});

it('keeps out of contact for the horizon with whatever velocity it permits (α = 1)', () => {
	const coordinate = fc.double({ min: -3, max: 3, noNaN: true });
	const speed = fc.double({ min: -1, max: 1, noNaN: true });
	const persons = fc.array(fc.tuple(coordinate, coordinate, speed, speed), { maxLength: 6 });
	fc.assert(
		fc.property(persons, speed, speed, (list, vx, vy) => {
			const people = list.filter(([x, y]) => Math.hypot(x, y) > 0.6).map(([x, y, ux, uy]) => agent(x, y, ux, uy));
			const { nearestVelocity: w } = ask(people, { robot: agent(0, 0, vx, vy, 0.3) });
			if (!w) return;
			for (const { x, y, vx: ux, vy: uy } of people) {
				const [rx, ry] = [ux - w.x, uy - w.y];
				const square = rx * rx + ry * ry;
				const time = square > 0 ? Math.min(3, Math.max(0, -(x * rx + y * ry) / square)) : 0;
				expect(Math.hypot(x + rx * time, y + ry * time)).toBeGreaterThanOrEqual(0.55 - 1e-6);
			}
		})
	);
});

it('never has less progress than the best point of a velocity grid', () => {
	const angle = fc.double({ min: -Math.PI, max: Math.PI, noNaN: true });
	fc.assert(
		fc.property(fc.array(angle, { minLength: 1, maxLength: 8 }), angle, (angles, heading) => {
			const people = angles.map((at, i) => agent((1 + 0.3 * i) * Math.cos(at), (1 + 0.3 * i) * Math.sin(at)));
			const direction = { x: Math.cos(heading), y: Math.sin(heading) };
			const room = ask(people, { preferredVelocity: direction });
			const grid = computeGridProgress(room.halfPlanes, direction, 1.5, 0.01);
			if (room.progress === null) expect(grid).toBeNull();
			else if (grid !== null) {
				expect(grid).toBeLessThanOrEqual(room.progress + 1e-9);
				expect(grid).toBeGreaterThan(room.progress - 0.3);
			}
		})
	);
});

describe('traps', () => {
	it('trap: α = ½ is not "more room": it grants half the slack outside the obstacle, and the other way round inside', () => {
		expect(ask([agent(3, 0)]).progress).toBeCloseTo(0.8167, 4);
		expect(ask([agent(3, 0)], { share: 0.5 }).progress).toBeCloseTo(0.4083, 4);
		expect(ask(ring(8, 1.2, 0)).progress).toBeCloseTo(0.225, 2);
		expect(ask(ring(8, 1.2, 0), { share: 0.5 }).progress).toBeCloseTo(0.112, 2);
		const overlapping = [agent(0.45, 0.1)];
		expect(ask(overlapping).progress).toBeCloseTo(-0.03, 2);
		expect(ask(overlapping, { share: 0.5 }).progress).toBeCloseTo(0.15, 2);
	});

	it('trap: the same crowd gives a stalled and a moving robot different answers', () => {
		expect(ask([agent(3, 0)], { robot: agent(0, 0, 1, 0, 0.3) }).progress).toBeCloseTo(1.4746, 4);
		expect(ask([agent(3, 0)]).progress).toBeCloseTo(0.8167, 4);
	});

	it('trap: progress can be met by a sidestep', () => {
		const { velocity } = ask([agent(3, 0)], { robot: agent(0, 0, 1, 0, 0.3) });
		expect(Math.abs(velocity!.y)).toBeGreaterThan(0.2);
	});

	it('trap: infeasible is a state of its own, not progress 0; an exact tie goes to the right-hand leg', () => {
		const crush = ask(ring(8, 0.9, -0.8));
		expect(crush).toMatchObject({ feasible: false, progress: null, velocity: null, nearestVelocity: null });
		expect(crush.leastViolation).toBeGreaterThan(0);
		const tie = ask([agent(3, 0)], { robot: agent(0, 0, 1, 0, 0.3) });
		expect(tie.halfPlanes[0]).toMatchObject({ tied: true, insideObstacle: true });
		expect(tie.velocity!.y).toBeLessThan(0);
	});

	it('trap: touching, overlapping, and behind are not the same as ahead; too short a horizon gives room', () => {
		expect(ask([agent(0, 0.55)], { robot: agent(0, 0, 0.5, 0, 0.3) }).progress).toBeCloseTo(1.5, 9);
		expect(ask([agent(-0.4, 0.05, -0.5, 0)], { robot: agent(0, 0, 0.3, 0, 0.3) }).progress).toBeCloseTo(1.5, 9);
		const behind = [agent(-1.5, 0.3, 1.5, 0)];
		expect(ask(behind, { robot: agent(0, 0, 0.8, 0, 0.3) }).progress).toBeCloseTo(1.5, 2);
		expect(ask([agent(3, 0)], { horizon: 1 }).progress).toBeCloseTo(1.5, 9);
	});

	it('trap: a doubled radius for comfort turns normal nearness into overlap and a push back', () => {
		expect(ask([agent(0.8, 0)]).progress).toBeGreaterThan(0);
		expect(ask([agent(0.8, 0, 0, 0, 0.6)]).progress).toBeLessThan(0);
	});

	it('one centre on the other has a way out, too', () => {
		const [plane] = ask([agent(0, 0)]).halfPlanes;
		expect(plane!.normal).toEqual({ x: 1, y: 0 });
	});
});

it('finds the least violation between two opposite half-planes in the middle (by hand)', () => {
	const facing = [
		{ point: { x: 0.5, y: 0 }, normal: { x: 1, y: 0 } },
		{ point: { x: -0.1, y: 0 }, normal: { x: -1, y: 0 } }
	];
	expect(findLeastViolation(facing, 1.5)).toBeCloseTo(0.3, 9);
});

it('has no progress without a preferred direction, but still a nearest velocity', () => {
	expect(ask([], { preferredVelocity: { x: 0, y: 0 } })).toMatchObject({
		feasible: true,
		progress: null,
		nearestVelocity: { x: 0, y: 0 },
		nearestProgress: null
	});
});

it('refuses a horizon that is not positive', () => {
	expect(() => ask([], { horizon: 0 })).toThrow(RangeError);
});
