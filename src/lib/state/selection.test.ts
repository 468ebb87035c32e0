import { describe, expect, it } from 'vitest';
import type { LiveAlarm, LiveFrame } from '../contracts/live.ts';
import { formatSelection, haltsOf, parseSelection, relate } from './selection.ts';

const frame = {
	robots: [
		{ key: 'porter-03', incident: 'i1' },
		{ key: 'guide-01', incident: null }
	],
	halts: [
		{ incident: 'i1', robot: 'porter-03' },
		{ incident: 'i2', robot: 'sweeper-02' }
	]
} as unknown as LiveFrame;
const alarms = [
	{ id: 4, robots: ['porter-03', 'sweeper-02'], incidents: ['i1', 'i2'] },
	{ id: 5, robots: [], incidents: [] }
] as unknown as LiveAlarm[];

describe('parseSelection', () => {
	it('reads what formatSelection writes, colons in the id included', () => {
		const selection = { kind: 'zone', id: 'hall:b' } as const;
		expect(parseSelection(formatSelection(selection))).toEqual(selection);
	});

	it.each([null, '', 'robot', 'robot:', ':porter', 'door:1'])('takes %j for no selection', (text) => {
		expect(parseSelection(text)).toBeNull();
	});
});

describe('relate', () => {
	it('goes from a robot to its incident and on to the alarm', () => {
		const related = relate({ kind: 'robot', id: 'porter-03' }, frame, alarms);
		expect([[...related.robots], [...related.incidents], [...related.alarms]]).toEqual([['porter-03'], ['i1'], [4]]);
	});

	it('goes from an alarm to every robot and incident of its cause group', () => {
		const related = relate({ kind: 'alarm', id: '4' }, frame, alarms);
		expect([...related.robots]).toEqual(['porter-03', 'sweeper-02']);
		expect(haltsOf(related, frame)).toHaveLength(2);
	});

	it('goes from an incident to its robot and alarm', () => {
		const related = relate({ kind: 'incident', id: 'i2' }, frame, alarms);
		expect([[...related.robots], [...related.alarms]]).toEqual([['sweeper-02'], [4]]);
	});

	it('keeps a selected robot without any data', () => {
		expect([...relate({ kind: 'robot', id: 'porter-03' }, null, []).robots]).toEqual(['porter-03']);
	});

	it('lights nothing but the zone for a zone', () => {
		const related = relate({ kind: 'zone', id: 'foyer' }, frame, alarms);
		expect([related.zone, related.robots.size, related.alarms.size]).toEqual(['foyer', 0, 0]);
	});
});
