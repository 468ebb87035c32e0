import { describe, expect, it, vi } from 'vitest';
import { CHANNELS, ObservedPerson, type People } from '../src/lib/contracts/mqtt.ts';
import { isInsideRing } from './core/nav-grid.ts';
import { WALKING } from './crowd/population.ts';
import { scenarioOf, type ScenarioName } from './scenarios.ts';
import type { Delivery } from './transport/link.ts';
import { fleetOf, SALTMARSH } from './venue/saltmarsh.ts';
import { World } from './world.ts';

const create = (name: ScenarioName, seed = 1, robots = 24) =>
	new World({ venue: SALTMARSH, fleet: fleetOf(robots), scenario: scenarioOf(name), seed, epoch: 1_700_000_000 });

function run(world: World, seconds: number): Delivery[] {
	const all: Delivery[] = [];
	for (let i = 0; i < seconds * 10; i++) all.push(...world.step(0.1));
	return all;
}

// Whole runs, on a machine that may be busy.
vi.setConfig({ testTimeout: 60_000 });

describe('World', () => {
	it('sends only messages of the contract', () => {
		const sent = run(create('day'), 20);
		const channels = new Set(sent.map(({ channel }) => channel));
		expect(channels).toEqual(new Set(['pose', 'people', 'state', 'connection']));
		for (const { channel, payload } of sent) {
			if (channel === 'unknown') throw new Error('rubbish in an orderly scenario');
			const { success, error } = CHANNELS[channel].schema.safeParse(payload);
			expect(error?.issues ?? []).toEqual([]);
			expect(success).toBe(true);
		}
	});

	it('gives the same run for the same seed, message for message, and another for another seed', () => {
		const [once, again, other] = [run(create('day', 5), 8), run(create('day', 5), 8), run(create('day', 6), 8)];
		expect(again).toEqual(once);
		expect(other).not.toEqual(once);
	});

	it('keeps people and robots on the floor and out of walls', () => {
		const world = create('doors-open', 2);
		run(world, 60);
		for (const { people, model } of world.floors) {
			const { outer, holes } = model.floor.walkable;
			for (let i = 0; i < people.end; i++) {
				if (!people.alive[i]) continue;
				const inside = isInsideRing(outer, people.x[i]!, people.y[i]!);
				const hole = holes.findIndex((ring) => isInsideRing(ring, people.x[i]!, people.y[i]!));
				expect({ slot: i, inside, hole }).toEqual({ slot: i, inside: true, hole: -1 });
			}
		}
		for (const { vehicle } of world.agents) {
			const { walls } = world.floors[vehicle.floor]!.driveGrid;
			expect(walls.distance(vehicle.x, vehicle.y)).toBeGreaterThan(0.6 * vehicle.radius);
		}
	});

	it('lets nobody walk against a wall behind which the goal lies', () => {
		const world = create('day', 1, 6);
		run(world, 120);
		const [{ people, driveGrid }] = world.floors as [(typeof world.floors)[0]];
		const walking: number[] = [];
		for (let i = 0; i < people.end; i++) if (people.alive[i] && people.mode[i] === WALKING) walking.push(i);
		const before = new Map(walking.map((i) => [people.uid[i]!, [people.x[i]!, people.y[i]!] as const]));
		run(world, 20);
		const pinned = walking.filter((i) => {
			const from = before.get(people.uid[i]!);
			if (!people.alive[i] || !from || people.mode[i] !== WALKING) return false;
			const moved = Math.hypot(people.x[i]! - from[0], people.y[i]! - from[1]);
			return moved < 1 && driveGrid.walls.distance(people.x[i]!, people.y[i]!) < 0.5;
		});
		expect(walking.length).toBeGreaterThan(40);
		expect(pinned.length).toBeLessThanOrEqual(2);
	});

	it('never says what is truly the case: messages hold the fields of the contract and not one more', () => {
		const sent = run(create('stuck'), 15);
		expect(sent.length).toBeGreaterThan(1000);
		for (const { channel, payload } of sent) {
			const { shape } = CHANNELS[channel as 'people'].schema;
			expect(Object.keys(payload as object).filter((key) => !(key in shape))).toEqual([]);
			for (const person of channel === 'people' ? (payload as People).persons : []) {
				expect(Object.keys(person).filter((key) => !(key in ObservedPerson.shape))).toEqual([]);
			}
		}
	});

	it.each([1, 2, 3, 4, 5])('freezes the robot of `stuck` within 10 s and holds it for a minute (seed %i)', (seed) => {
		const world = create('stuck', seed, 3);
		run(world, 70);
		const [halt] = world.truth.halts.filter(({ robot }) => robot === 'porter-01');
		expect(halt).toMatchObject({ kind: 'freeze', cause: 'people', end: null });
		expect(halt!.onset).toBeGreaterThan(3);
		expect(halt!.onset).toBeLessThan(10);
		expect(halt!.personsWithin2m).toBeGreaterThan(8);
	});

	it('has the broker speak for a robot that drove into a radio hole, and lets it come back', () => {
		const world = create('wifi-hole', 3);
		const sent = run(world, 400);
		const lost = sent.filter(({ byWill }) => byWill);
		expect(lost.length).toBeGreaterThan(0);
		expect(lost[0]!.payload).toMatchObject({ status: 'lost' });
		const { robot, arrivesAt } = lost[0]!;
		const later = sent.filter((d) => d.robot === robot && d.channel === 'connection' && d.arrivesAt > arrivesAt);
		expect(later[0]?.payload).toMatchObject({ status: 'online' });
		expect(world.truth.halts.some(({ kind, cause }) => kind === 'silent' && cause === 'radio')).toBe(true);
	});

	it('sends rubbish only where rubbish was asked for', () => {
		const isGood = ({ channel, payload }: Delivery) =>
			channel !== 'unknown' && CHANNELS[channel].schema.safeParse(payload).success;
		const sent = run(create('rubbish', 4), 15);
		const bad = sent.filter((delivery) => !isGood(delivery)).length / sent.length;
		expect(bad).toBeGreaterThan(0.005);
		expect(bad).toBeLessThan(0.05);
	});

	it('puts clocks off in bad-clock and nowhere else', () => {
		const worst = (name: ScenarioName) => Math.max(...create(name).agents.map(({ link }) => Math.abs(link.offset)));
		expect(worst('bad-clock')).toBeGreaterThan(60);
		expect(worst('day')).toBeLessThan(0.1);
	});
});
