import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { LiveAlarm, LiveDelta, LiveFrame, LiveHalt, LiveRobot } from '../contracts/live.ts';
import { mergeAlarm, mergeDelta } from './live-merge.ts';

const robot = (key: string, x_m = 0) => ({ key, x_m }) as unknown as LiveRobot;
const frame = (...robots: LiveRobot[]): LiveFrame => ({
	floor: 'f',
	venue: 'v',
	server_time_ms: 1,
	robots,
	persons: [],
	zones: [],
	halts: [{ incident: 'i1' } as LiveHalt],
	observed_m2: 0,
	coverage: 0,
	flexibility: { value_m_s: 0.3, n: 0, learned: false, noise_floor_m_s: 0.2 }
});
const delta = (change: Partial<LiveDelta>): LiveDelta => ({
	server_time_ms: 2,
	robots: [],
	robots_gone: [],
	persons: [],
	zones: [],
	observed_m2: 10,
	coverage: 0.5,
	...change
});
const alarm = (id: number, revision: number, state: LiveAlarm['state'] = 'unacknowledged') =>
	({ id, revision, state }) as LiveAlarm;

describe('mergeDelta', () => {
	it('replaces in place, appends the new and drops the gone', () => {
		const next = mergeDelta(
			frame(robot('a'), robot('b'), robot('c')),
			delta({ robots: [robot('b', 7), robot('d')], robots_gone: ['a'] })
		);
		expect(next.robots.map(({ key, x_m }) => [key, x_m])).toEqual([
			['b', 7],
			['c', 0],
			['d', 0]
		]);
		expect(next.server_time_ms).toBe(2);
	});

	it('keeps the halts unless the delta names them, and an empty list ends them', () => {
		expect(mergeDelta(frame(), delta({})).halts).toHaveLength(1);
		expect(mergeDelta(frame(), delta({ halts: [] })).halts).toHaveLength(0);
	});

	it('leaves the earlier frame as it was', () => {
		const before = frame(robot('a'));
		mergeDelta(before, delta({ robots: [robot('a', 9)], robots_gone: ['a'] }));
		expect(before.robots[0]?.x_m).toBe(0);
	});
});

describe('mergeAlarm', () => {
	it('ignores an older revision that arrives late', () => {
		const known = [alarm(1, 3, 'acknowledged')];
		expect(mergeAlarm(known, alarm(1, 2))).toBe(known);
	});

	it('ends at the highest revision in whatever order the news come', () => {
		fc.assert(
			fc.property(fc.shuffledSubarray([1, 2, 3, 4, 5], { minLength: 1 }), (revisions) => {
				const end = revisions.reduce<readonly LiveAlarm[]>(
					(list, revision) => mergeAlarm(list, alarm(7, revision)),
					[]
				);
				expect(end).toEqual([alarm(7, Math.max(...revisions))]);
			})
		);
	});

	it('forgets cleared alarms at some point and open ones never', () => {
		let list: readonly LiveAlarm[] = [alarm(0, 1)];
		for (let id = 1; id <= 100; id++) list = mergeAlarm(list, alarm(id, 1, 'cleared'));
		expect(list.length).toBeLessThan(30);
		expect(list[0]).toEqual(alarm(0, 1));
		expect(list.at(-1)?.id).toBe(100);
	});
});
