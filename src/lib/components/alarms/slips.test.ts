import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { AlarmPriority, AlarmState, LiveAlarm } from '../../contracts/live.ts';
import { arrangeSlips, orderSlips } from './slips.ts';

const alarm = (
	id: number,
	priority: AlarmPriority,
	onset_ms: number,
	acknowledged = false,
	state: AlarmState = 'unacknowledged'
) => ({ id, priority, onset_ms, state, acknowledged_at_ms: acknowledged ? 1 : null }) as LiveAlarm;
const ids = (alarms: readonly LiveAlarm[]) => alarms.map(({ id }) => id);

describe('orderSlips', () => {
	it('puts priority before acknowledgement before age', () => {
		const order = orderSlips([
			alarm(1, 'low', 10),
			alarm(2, 'high', 50, true),
			alarm(3, 'high', 90),
			alarm(4, 'high', 40),
			alarm(5, 'medium', 5)
		]);
		expect(ids(order)).toEqual([4, 3, 2, 5, 1]);
	});

	it('keeps a returned alarm until somebody has acknowledged it, and drops cleared ones', () => {
		expect(ids(orderSlips([alarm(1, 'low', 1, false, 'returned'), alarm(2, 'high', 1, true, 'cleared')]))).toEqual([1]);
	});

	it('does not depend on the order alarms came in', () => {
		const some = [alarm(1, 'low', 3), alarm(2, 'low', 3), alarm(3, 'high', 9), alarm(4, 'medium', 1, true)];
		fc.assert(
			fc.property(fc.shuffledSubarray(some, { minLength: some.length }), (shuffled) => {
				expect(ids(orderSlips(shuffled))).toEqual([3, 4, 1, 2]);
			})
		);
	});
});

describe('arrangeSlips while somebody is at the column', () => {
	const before = [alarm(1, 'medium', 10), alarm(2, 'low', 20)];
	const held = [1, 2];

	it('moves no slip, whatever comes', () => {
		const { shown, waiting } = arrangeSlips([...before, alarm(3, 'high', 30)], held);
		expect([ids(shown), ids(waiting)]).toEqual([[1, 2], [3]]);
	});

	it('shows news in place, a clearing included', () => {
		const { shown } = arrangeSlips([alarm(1, 'medium', 10, true, 'cleared'), alarm(2, 'low', 20, true)], held);
		expect(shown.map(({ state }) => state)).toEqual(['cleared', 'unacknowledged']);
	});

	it('lets everything fall into place afterwards', () => {
		const { shown, waiting } = arrangeSlips([...before, alarm(3, 'high', 30)], null);
		expect([ids(shown), ids(waiting)]).toEqual([[3, 1, 2], []]);
	});
});
