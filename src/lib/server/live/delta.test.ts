import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { LiveFrame, LiveHalt, LiveRobot, LiveZone } from '../../contracts/live.ts';
import { mergeDelta } from '../../state/live-merge.ts';
import { canFollow, computeDelta } from './delta.ts';

/** What comes from a message is a plain object, so these are too. */
const record = <T>(model: { [K in keyof T]: fc.Arbitrary<T[K]> }) => fc.record(model, { noNullPrototype: true });

const robot = record({
	key: fc.constantFrom('a', 'b', 'c', 'd'),
	x_m: fc.option(fc.integer({ min: 0, max: 3 })),
	pose_age_ms: fc.nat(2),
	errors: fc.array(record({ code: fc.constantFrom('x', 'y') }), { maxLength: 1 })
}) as unknown as fc.Arbitrary<LiveRobot>;
const zone = record({
	key: fc.constantFrom('p', 'q', 'r'),
	persons: fc.nat(2)
}) as unknown as fc.Arbitrary<LiveZone>;
const halts = fc.array(record({ incident: fc.constantFrom('i', 'j') }), {
	maxLength: 2
}) as unknown as fc.Arbitrary<LiveHalt[]>;
const byKey = { selector: ({ key }: { key: string }) => key };

const frame: fc.Arbitrary<LiveFrame> = record({
	floor: fc.constant('ground'),
	venue: fc.constant('quay'),
	server_time_ms: fc.nat(),
	robots: fc.uniqueArray(robot, byKey),
	persons: fc.array(record({ id: fc.nat(3) })) as unknown as fc.Arbitrary<LiveFrame['persons']>,
	zones: fc.uniqueArray(zone, byKey),
	halts,
	observed_m2: fc.nat(9),
	coverage: fc.constantFrom(0, 0.5, 1),
	flexibility: fc.constantFrom(0, 80).map((n) => ({ value_m_s: 0.3, n, learned: n > 50, noise_floor_m_s: 0.2 }))
});

const sorted = (frame: LiveFrame): LiveFrame => {
	const order = <T extends { readonly key: string }>(items: readonly T[]) =>
		[...items].sort((a, b) => a.key.localeCompare(b.key));
	return { ...frame, robots: order(frame.robots), zones: order(frame.zones) };
};

describe('a delta', () => {
	it('leads the browser from one frame to exactly the next, whenever it can follow', () => {
		fc.assert(
			fc.property(frame, frame, (before, after) => {
				fc.pre(canFollow(before, after));
				expect(sorted(mergeDelta(before, computeDelta(before, after)))).toEqual(sorted(after));
			})
		);
	});

	it('names no robot, zone or halt that has not changed', () => {
		fc.assert(
			fc.property(frame, (same) => {
				const delta = computeDelta(same, structuredClone(same));
				expect(delta).toMatchObject({ robots: [], robots_gone: [], zones: [] });
				expect(delta).not.toHaveProperty('halts');
			})
		);
	});

	it('cannot take a zone away', () => {
		const [p, q] = fc.sample(fc.tuple(zone, zone), 1)[0]!;
		const base = fc.sample(frame, 1)[0]!;
		const before = {
			...base,
			zones: [
				{ ...p, key: 'p' },
				{ ...q, key: 'q' }
			]
		};
		expect(canFollow(before, { ...before, zones: [before.zones[0]!] })).toBe(false);
		expect(canFollow({ ...before, zones: [] }, before)).toBe(true);
	});
});
