import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Failure } from '../failure.ts';
import {
	CLEARED_ALARM,
	LONGEST_SHELVING,
	isWithheld,
	standingOf,
	stepAlarm,
	type AlarmAct,
	type AlarmCore
} from './life-cycle.ts';

const raise = (at: number): AlarmAct => ({ type: 'raise', at });
const clear = (at: number): AlarmAct => ({ type: 'clear', at });
const acknowledge = (at: number, by = 'operator-1'): AlarmAct => ({ type: 'acknowledge', at, by });
const reannunciate = (at: number): AlarmAct => ({ type: 'reannunciate', at });
const shelve = (at: number, until: number, oneShot = false): AlarmAct => ({
	type: 'shelve',
	at,
	until,
	oneShot,
	by: 'operator-1',
	reason: 'door works'
});
const unshelve = (at: number): AlarmAct => ({ type: 'unshelve', at, by: 'operator-1' });
const expire = (at: number): AlarmAct => ({ type: 'expire', at });
const suppress = (at: number, by = 'rule-1'): AlarmAct => ({ type: 'suppress', at, by, reason: 'concert let-out' });
const unsuppress = (at: number, by = 'rule-1'): AlarmAct => ({ type: 'unsuppress', at, by });
const takeOut = (at: number): AlarmAct => ({ type: 'take_out', at, by: 'maintainer-1', reason: 'sensor exchange' });
const putBack = (at: number): AlarmAct => ({ type: 'put_back', at, by: 'maintainer-1' });

const after = (acts: AlarmAct[], start: AlarmCore = CLEARED_ALARM): AlarmCore =>
	acts.reduce((alarm, act) => stepAlarm(alarm, act).alarm, start);
const states = (acts: AlarmAct[]) => acts.map((_, i) => after(acts.slice(0, i + 1)).state);
/** Which of the acts call the operators. */
const calls = (acts: AlarmAct[]) => acts.map((act, i) => stepAlarm(after(acts.slice(0, i)), act).annunciate);

const UNACKNOWLEDGED = after([raise(1)]);
const ACKNOWLEDGED = after([raise(1), acknowledge(2)]);
const RETURNED = after([raise(1), clear(2)]);

describe('the four states (test transitions of ISA-18.2 / IEC 62682)', () => {
	it('cleared, condition true: unacknowledged, called once', () => {
		const { alarm, annunciate, changes } = stepAlarm(CLEARED_ALARM, raise(10));
		expect(alarm).toEqual({ ...CLEARED_ALARM, state: 'unacknowledged', active: true, raisedAt: 10 });
		expect(annunciate).toBe(true);
		expect(changes).toEqual([
			{ act: 'raise', what: 'state', from: 'cleared', to: 'unacknowledged', at: 10, by: null, reason: null }
		]);
	});

	it('unacknowledged: acknowledged by a person, returned when the condition clears, both without a call', () => {
		expect(ACKNOWLEDGED).toEqual({
			...CLEARED_ALARM,
			state: 'acknowledged',
			active: true,
			raisedAt: 1,
			acknowledgedAt: 2,
			acknowledgedBy: 'operator-1'
		});
		expect(RETURNED).toEqual({ ...CLEARED_ALARM, state: 'returned', raisedAt: 1, returnedAt: 2 });
		expect(calls([raise(1), acknowledge(2)])).toEqual([true, false]);
		expect(calls([raise(1), clear(2)])).toEqual([true, false]);
	});

	it('acknowledged, condition clears: cleared', () => {
		expect(after([clear(9)], ACKNOWLEDGED)).toMatchObject({ state: 'cleared', returnedAt: 9, acknowledgedAt: 2 });
	});

	it('returned: cleared when acknowledged, unacknowledged and called again when the condition is back', () => {
		expect(after([acknowledge(9)], RETURNED)).toMatchObject({ state: 'cleared', acknowledgedAt: 9, returnedAt: 2 });
		const { alarm, annunciate } = stepAlarm(RETURNED, raise(9));
		expect(alarm).toMatchObject({ state: 'unacknowledged', raisedAt: 1, returnedAt: null });
		expect(annunciate).toBe(true);
	});

	it('acknowledged for longer than the re-alarm time: unacknowledged, called anew', () => {
		const { alarm, annunciate } = stepAlarm(ACKNOWLEDGED, reannunciate(1800));
		expect(alarm).toMatchObject({ state: 'unacknowledged', acknowledgedAt: null, acknowledgedBy: null });
		expect(annunciate).toBe(true);
	});

	it('a new life begins with the next raise after it was cleared, without the old acknowledgement', () => {
		const { alarm, annunciate } = stepAlarm(after([raise(1), acknowledge(2), clear(3)]), raise(50));
		expect(alarm).toEqual({ ...CLEARED_ALARM, state: 'unacknowledged', active: true, raisedAt: 50 });
		expect(annunciate).toBe(true);
	});
});

describe('acts that do not apply', () => {
	it('leave the very same alarm, with nothing to record and nobody called', () => {
		const idle: [AlarmCore, AlarmAct][] = [
			[CLEARED_ALARM, clear(5)],
			[CLEARED_ALARM, acknowledge(5)],
			[CLEARED_ALARM, reannunciate(5)],
			[CLEARED_ALARM, unshelve(5)],
			[CLEARED_ALARM, expire(5)],
			[CLEARED_ALARM, unsuppress(5)],
			[CLEARED_ALARM, putBack(5)],
			[CLEARED_ALARM, { type: 'suppress', at: 5, by: 'rule-1' }],
			[CLEARED_ALARM, { type: 'take_out', at: 5, by: 'maintainer-1' }],
			[UNACKNOWLEDGED, raise(5)],
			[UNACKNOWLEDGED, reannunciate(5)],
			[UNACKNOWLEDGED, { type: 'acknowledge', at: 5 }],
			[ACKNOWLEDGED, raise(5)],
			[RETURNED, clear(5)],
			[RETURNED, reannunciate(5)],
			[after([suppress(1)]), suppress(5)],
			[after([suppress(1)]), unsuppress(5, 'rule-2')],
			[after([takeOut(1)]), takeOut(5)]
		];
		for (const [alarm, act] of idle) {
			const step = stepAlarm(alarm, act);
			expect(step.alarm).toBe(alarm);
			expect(step).toMatchObject({ changes: [], annunciate: false });
		}
	});

	it('a second acknowledgement keeps the first who and when', () => {
		const second = stepAlarm(ACKNOWLEDGED, acknowledge(60, 'operator-2'));
		expect(second.changes).toEqual([]);
		expect(second.alarm).toMatchObject({ acknowledgedAt: 2, acknowledgedBy: 'operator-1' });
	});

	it('a time that is no number is a mistake of the caller', () => {
		expect(() => stepAlarm(CLEARED_ALARM, raise(NaN))).toThrow(Failure);
	});
});

describe('shelving', () => {
	it('is taken from any state, without a call, and recorded with who, when and why', () => {
		for (const alarm of [CLEARED_ALARM, UNACKNOWLEDGED, ACKNOWLEDGED, RETURNED]) {
			const { alarm: shelved, changes, annunciate } = stepAlarm(alarm, shelve(100, 400));
			expect(standingOf(shelved)).toBe('shelved');
			expect(annunciate).toBe(false);
			expect(shelved.state).toBe(alarm.state);
			const told = { at: 100, by: 'operator-1', reason: 'door works' };
			expect(changes).toEqual([{ act: 'shelve', what: 'standing', from: 'in_service', to: 'shelved', ...told }]);
		}
	});

	it('is refused without a reason, without a person, without an end, or beyond one shift', () => {
		const refused: AlarmAct[] = [
			shelve(100, 100),
			shelve(100, NaN),
			shelve(100, Infinity),
			shelve(100, 101 + LONGEST_SHELVING),
			{ ...shelve(100, 200), reason: '  ' },
			{ type: 'shelve', at: 100, until: 200, reason: 'door works' },
			{ type: 'shelve', at: 100, by: 'operator-1', reason: 'door works' }
		];
		for (const act of refused) expect(stepAlarm(UNACKNOWLEDGED, act).alarm).toBe(UNACKNOWLEDGED);
		expect(stepAlarm(UNACKNOWLEDGED, shelve(100, 100 + LONGEST_SHELVING)).changes).toHaveLength(1);
		expect(stepAlarm(UNACKNOWLEDGED, shelve(100, 400), 60).alarm).toBe(UNACKNOWLEDGED);
	});

	it('keeps silent while the condition is true, and still records it', () => {
		const { alarm, annunciate, changes } = stepAlarm(after([shelve(1, 500)]), raise(20));
		expect(annunciate).toBe(false);
		expect(changes).toMatchObject([{ act: 'raise', what: 'state', from: 'cleared', to: 'unacknowledged', at: 20 }]);
		expect(alarm).toMatchObject({ active: true, raisedAt: 20 });
	});

	it.each([
		['expiry', expire(500)],
		['unshelving', unshelve(300)]
	])('%s calls afresh when the condition holds, even if it was acknowledged before', (_, act) => {
		for (const alarm of [UNACKNOWLEDGED, ACKNOWLEDGED]) {
			const step = stepAlarm(after([shelve(10, 500)], alarm), act);
			expect(step.alarm).toMatchObject({ state: 'unacknowledged', acknowledgedBy: null, shelving: null });
			expect(step.annunciate).toBe(true);
			expect(step.changes.at(-1)).toMatchObject({ what: 'standing', from: 'shelved', to: 'in_service' });
			expect(step.changes).toHaveLength(alarm === ACKNOWLEDGED ? 2 : 1);
		}
	});

	it('ends cleared, without a call, when the condition is gone', () => {
		const acts = [raise(1), shelve(10, 500), clear(20), expire(500)];
		expect(states(acts)).toEqual(['unacknowledged', 'unacknowledged', 'returned', 'cleared']);
		expect(calls(acts)).toEqual([true, false, false, false]);
	});

	it('does not expire before its end', () => {
		const shelved = after([shelve(10, 500)], UNACKNOWLEDGED);
		expect(stepAlarm(shelved, expire(499)).alarm).toBe(shelved);
	});

	it('for one shot ends when the condition clears, or at its end', () => {
		const acts = [raise(1), shelve(10, 500, true), clear(20), raise(30)];
		expect(states(acts)).toEqual(['unacknowledged', 'unacknowledged', 'cleared', 'unacknowledged']);
		expect(calls(acts)).toEqual([true, false, false, true]);
		expect(calls([raise(1), shelve(10, 500, true), expire(500)])).toEqual([true, false, true]);
	});

	it('can be prolonged, which is recorded', () => {
		const { alarm, changes } = stepAlarm(after([shelve(10, 500)]), shelve(400, 900));
		expect(alarm.shelving).toMatchObject({ since: 400, until: 900 });
		expect(changes).toMatchObject([{ act: 'shelve', what: 'standing', from: 'shelved', to: 'shelved', at: 400 }]);
	});

	it('stops re-annunciation', () => {
		const shelved = after([shelve(10, 500)], ACKNOWLEDGED);
		expect(stepAlarm(shelved, reannunciate(400)).alarm).toBe(shelved);
	});
});

describe('suppressed by design and out of service', () => {
	it('stay silent until the last reason is gone', () => {
		const acts = [
			suppress(1),
			raise(2),
			suppress(3, 'rule-2'),
			unsuppress(4),
			takeOut(5),
			unsuppress(6, 'rule-2'),
			putBack(7)
		];
		expect(calls(acts)).toEqual([false, false, false, false, false, false, true]);
	});

	it('are shown in the strongest list, and name what withholds the alarm', () => {
		const all = after([shelve(1, 500), suppress(2), takeOut(3)]);
		expect(standingOf(all)).toBe('out_of_service');
		expect(all.outOfService).toEqual({ by: 'maintainer-1', since: 3, reason: 'sensor exchange' });
		expect(standingOf(after([putBack(4)], all))).toBe('suppressed');
		expect(standingOf(after([putBack(4), unsuppress(5)], all))).toBe('shelved');
		expect(isWithheld(after([putBack(4), unsuppress(5), unshelve(6)], all))).toBe(false);
	});

	it('end cleared when the condition is gone', () => {
		expect(states([raise(1), takeOut(2), clear(3), putBack(4)]).at(-1)).toBe('cleared');
	});

	it('outlive the life of an alarm', () => {
		const acts = [suppress(1), raise(2), acknowledge(3), clear(4), raise(5)];
		expect(states(acts).slice(-2)).toEqual(['cleared', 'unacknowledged']);
		expect(standingOf(after(acts))).toBe('suppressed');
		expect(calls(acts)).not.toContain(true);
	});
});

describe('any history', () => {
	const make = fc.oneof(
		fc.constantFrom(raise, clear, acknowledge, reannunciate, unshelve, expire, suppress, unsuppress, takeOut, putBack),
		fc.boolean().map((oneShot) => (at: number) => shelve(at, at + 3, oneShot))
	);
	const history = fc.array(make, { maxLength: 40 }).map((makers) => makers.map((maker, i) => maker(i)));

	it('calls exactly when it becomes unacknowledged or is let go unacknowledged, never while withheld', () => {
		fc.assert(
			fc.property(history, (acts) => {
				let alarm = CLEARED_ALARM;
				for (const act of acts) {
					const step = stepAlarm(alarm, act);
					const attention = (core: AlarmCore) => core.state === 'unacknowledged' && !isWithheld(core);
					expect(step.annunciate).toBe(attention(step.alarm) && !attention(alarm));
					alarm = step.alarm;
				}
			})
		);
	});

	it('follows the condition and knows its acknowledgement, whatever is withheld', () => {
		fc.assert(
			fc.property(history, (acts) => {
				let alarm = CLEARED_ALARM;
				let condition = false;
				for (const act of acts) {
					const step = stepAlarm(alarm, act);
					if (act.type === 'raise') condition = true;
					if (act.type === 'clear') condition = false;
					expect(step.alarm.active).toBe(condition);
					expect(step.alarm.state === 'unacknowledged' || step.alarm.state === 'acknowledged').toBe(condition);
					if (step.alarm.state === 'acknowledged') expect(step.alarm.acknowledgedBy).toBe('operator-1');
					if (step.alarm.state === 'unacknowledged') expect(step.alarm.acknowledgedBy).toBeNull();
					expect(step.changes.length > 0).toBe(step.alarm !== alarm);
					alarm = step.alarm;
				}
			})
		);
	});

	it('survives a restart: written out and read back at any point, it goes on the same', () => {
		fc.assert(
			fc.property(history, fc.nat(40), (acts, cut) => {
				const saved = JSON.parse(JSON.stringify(after(acts.slice(0, cut)))) as AlarmCore;
				expect(after(acts.slice(cut), saved)).toEqual(after(acts));
			})
		);
	});
});
