import { expect, it } from 'vitest';
import type { LiveAlarm } from '../../contracts/live.ts';
import { announceAlarms } from './announce.ts';

const alarm = (priority: string) =>
	({
		priority,
		place: 'Food court',
		robots: ['porter-03'],
		what: 'stuck',
		action: 'Send someone.'
	}) as Partial<LiveAlarm> as LiveAlarm;

it('reads a single alarm in full: place, robot, what to do', () => {
	expect(announceAlarms([alarm('medium')])).toEqual({
		words: 'New medium alarm. Food court: porter-03 stuck. Send someone.',
		urgent: false
	});
});

it('counts a flood instead of reading it, and interrupts only for high', () => {
	expect(announceAlarms([alarm('low'), alarm('high'), alarm('high')])).toEqual({
		words: '3\u00a0new alarms, 2 high.',
		urgent: true
	});
});

it('says nothing when nothing is new', () => {
	expect(announceAlarms([])).toBeNull();
});
