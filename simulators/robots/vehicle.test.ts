import { describe, expect, it, vi } from 'vitest';
import type { Command } from '../../src/lib/contracts/mqtt.ts';
import { CALM, SMALL_VENUE, smallFleet } from '../../tests/support/fleet-venue.ts';
import { createRandom } from '../core/random.ts';
import type { Planner } from '../venue/model.ts';
import { World } from '../world.ts';

/** One robot in the small venue that goes only where it is told to. */
function lonely(planner: Planner = 'decoupled', yielding = 0, seed = 1) {
	const scenario = { ...CALM, yielding, peak: [200] };
	// Nobody arrives by themselves: the timetable asks for an empty house.
	const quiet = {
		...scenario,
		timetable: { ...scenario.timetable, phases: [{ key: 'closed', seconds: 1e6, fill: 0, wishes: {} }] }
	};
	const world = new World({
		venue: SMALL_VENUE,
		fleet: smallFleet(1, planner),
		scenario: quiet,
		seed,
		epoch: 1_700_000_000
	});
	const { vehicle } = world.agents[0]!;
	vehicle.errands.hold = true;
	return { world, vehicle, floor: world.floors[0]! };
}

const goal = { key: 'east', x: 27, y: 6 };
const run = (world: World, seconds: number) => {
	for (let i = 0; i < seconds * 10; i++) world.step(0.1);
};

vi.setConfig({ testTimeout: 60_000 });

describe('driving', () => {
	it('gets through the door to its goal on empty floor, at about its own speed', () => {
		const { world, vehicle } = lonely();
		vehicle.place(3, 10, 0);
		vehicle.errands.assign(goal, 0, 0);
		run(world, 45);
		expect(Math.hypot(vehicle.x - goal.x, vehicle.y - goal.y)).toBeLessThan(0.5);
		expect(world.truth.halts).toEqual([]);
	});

	it('goes round a standing person instead of asking for everything: people do not do all the avoiding', () => {
		const { world, vehicle, floor } = lonely('decoupled', 0);
		vehicle.place(18, 6, 0);
		vehicle.errands.assign(goal, 0, 0);
		const slot = floor.life.place(22, 6, Infinity);
		let widest = 0;
		for (let i = 0; i < 250; i++) {
			world.step(0.1);
			widest = Math.max(widest, Math.abs(vehicle.y - 6));
		}
		expect(Math.hypot(vehicle.x - goal.x, vehicle.y - goal.y)).toBeLessThan(0.5);
		expect(widest).toBeGreaterThan(0.3);
		expect(Math.hypot(floor.people.x[slot]! - 22, floor.people.y[slot]! - 6)).toBeLessThan(0.1);
	});

	it('freezes in a ring of people who do not move, and the truth says so', () => {
		const { world, vehicle, floor } = lonely('decoupled', 0);
		vehicle.place(20, 6, 0);
		vehicle.errands.assign(goal, 0, 0);
		for (let k = 0; k < 9; k++) {
			const angle = (2 * Math.PI * k) / 9;
			floor.life.place(23 + 1.1 * Math.cos(angle), 6 + 1.1 * Math.sin(angle), Infinity);
			floor.life.place(23 + 1.9 * Math.cos(angle + 0.3), 6 + 1.9 * Math.sin(angle + 0.3), Infinity);
		}
		vehicle.place(23, 6, 0);
		vehicle.errands.assign(goal, 0, 0);
		run(world, 20);
		expect(world.truth.halts).toHaveLength(1);
		expect(world.truth.halts[0]).toMatchObject({ kind: 'freeze', cause: 'people', end: null, wouldYield: 0 });
		expect(world.truth.halts[0]!.onset).toBeLessThan(3);
		expect(Math.hypot(vehicle.x - 23, vehicle.y - 6)).toBeLessThan(0.6);
	});

	it('stalls before a thing put down in its way, and goes on when it is gone', () => {
		const { world, vehicle } = lonely();
		vehicle.place(18, 6, 0);
		vehicle.errands.assign(goal, 0, 0);
		run(world, 3);
		vehicle.faults.start('obstruction', world.time, 15);
		run(world, 30);
		const [halt] = world.truth.halts;
		expect(halt).toMatchObject({ kind: 'stall', cause: 'obstruction', endedBy: 'progress' });
		expect(halt!.onset).toBeGreaterThan(2.9);
		expect(halt!.onset).toBeLessThan(5);
		expect(halt!.end! - halt!.onset).toBeGreaterThan(13);
	});

	it('stops by plan when paused: no halt', () => {
		const { world, vehicle } = lonely();
		vehicle.place(18, 6, 0);
		vehicle.errands.assign(goal, 0, 0);
		run(world, 2);
		vehicle.errands.paused = true;
		run(world, 20);
		expect(vehicle.speed).toBe(0);
		expect(world.truth.halts).toEqual([]);
	});
});

describe('yielding', () => {
	/** m a counting robot gets on through a loose standing crowd in a minute, mean over crowds. */
	function progressAt(yielding: number): number {
		let total = 0;
		for (let seed = 1; seed <= 4; seed++) {
			const { world, vehicle, floor } = lonely('counting', yielding, seed);
			const random = createRandom(`crowd/${seed}`);
			for (let i = 0; i < 110; i++) floor.life.place(random.between(18.5, 26), random.between(0.5, 11.5), Infinity);
			vehicle.place(16.5, 6, 0);
			vehicle.errands.assign(goal, 0, 0);
			const start = vehicle.remaining()!;
			run(world, 60);
			total += start - (vehicle.remaining() ?? 0);
		}
		return total / 4;
	}

	it('decides how far a robot gets: 0, 0.3 and 0.7 differ, and more is farther', () => {
		const [none, some, most] = [progressAt(0), progressAt(0.3), progressAt(0.7)];
		expect(some).toBeGreaterThan(none + 0.3);
		expect(most).toBeGreaterThan(some + 0.3);
	});

	it('is not given to a robot that shows no wish to move: a frozen decoupled robot parts no crowd', () => {
		const { world, vehicle, floor } = lonely('decoupled', 1);
		vehicle.place(23, 6, 0);
		for (let k = 0; k < 9; k++) {
			const angle = (2 * Math.PI * k) / 9;
			floor.life.place(23 + 0.8 * Math.cos(angle), 6 + 0.8 * Math.sin(angle), Infinity);
		}
		vehicle.errands.assign(goal, 0, 0);
		run(world, 8);
		expect(vehicle.wantX).toBe(0);
		expect(world.truth.halts[0]).toMatchObject({ kind: 'freeze', wouldYield: 1 });
	});
});

describe('commands', () => {
	const command = (kind: Command['kind'], args?: Command['args']): Command => ({
		id: `c-${kind}`,
		kind,
		...(args ? { args } : {}),
		expires_at: 1_700_000_900_000
	});
	const answersTo = (world: World, ...commands: Command[]) => {
		for (const one of commands) world.command('cart-1', one);
		return world
			.step(0.1)
			.filter(({ channel }) => channel === 'answer')
			.map(({ payload }) => payload as { id: string; status: string });
	};

	it('are seen and done: pause stops, resume goes on', () => {
		const { world, vehicle } = lonely();
		vehicle.place(18, 6, 0);
		vehicle.errands.assign(goal, 0, 0);
		run(world, 2);
		expect(answersTo(world, command('pause')).map(({ status }) => status)).toEqual(['seen', 'done']);
		run(world, 3);
		expect(vehicle.speed).toBe(0);
		answersTo(world, command('resume'));
		run(world, 3);
		expect(vehicle.speed).toBeGreaterThan(0.5);
	});

	it('hold_at goes to a place of the robot’s own map, says running, then done, and stays there paused', () => {
		const { world, vehicle } = lonely();
		vehicle.place(18, 6, 0);
		run(world, 1);
		const args = { x: vehicle.frame.x(24, 3), y: vehicle.frame.y(24, 3) };
		expect(answersTo(world, command('hold_at', args)).map(({ status }) => status)).toEqual(['seen', 'running']);
		let done = false;
		for (let i = 0; i < 400; i++) {
			done ||= world
				.step(0.1)
				.some(({ channel, payload }) => channel === 'answer' && (payload as { status: string }).status === 'done');
		}
		expect(done).toBe(true);
		expect(Math.hypot(vehicle.x - 24, vehicle.y - 3)).toBeLessThan(0.5);
		expect(vehicle.paused).toBe(true);
	});

	it('are refused when expired or leading nowhere', () => {
		const { world } = lonely();
		run(world, 1);
		expect(
			answersTo(world, { ...command('pause'), expires_at: 1_600_000_000_000 }).map(({ status }) => status)
		).toEqual(['refused']);
		expect(answersTo(world, command('hold_at', { x: 'there' })).map(({ status }) => status)).toEqual([
			'seen',
			'refused'
		]);
	});
});
