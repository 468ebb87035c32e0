import { expect, it } from 'vitest';
import type { ZoneResult } from './frame.ts';
import { addDensity, addDrives, bandOf, closeMinutes, EMPTY_TALLY, stopClock, type Drive } from './tally.ts';

const drive = (time: number, robot = 'porter-01'): Drive => ({
	time,
	robot,
	zone: 'hall-a',
	band: '0.2-0.5',
	taskedS: 1,
	movingS: 1,
	distance: 0.8,
	halts: 0
});
const zone = (density: number | null, coverage: number, persons: number): ZoneResult => ({
	key: 'hall-a',
	density,
	classic: density,
	coverage,
	observedArea: coverage * 100,
	persons,
	level: null,
	aboveThreshold: false
});

it('puts a density on the lower bound of a band into that band, and an unmeasured one into none', () => {
	expect([0, 0.049, 0.05, 0.5, 7, null, NaN].map(bandOf)).toEqual([
		'0-0.05',
		'0-0.05',
		'0.05-0.1',
		'0.5-1',
		'2+',
		'unseen',
		'unseen'
	]);
});

it('trap "exposure is driving in that band": the clock stops at onset, seconds until detection are not exposure', () => {
	let tally = addDrives(
		EMPTY_TALLY,
		[1, 2, 3, 4, 5, 6, 7, 8].map((second) => drive(600 + second))
	);
	tally = stopClock(tally, 'porter-01', 603, 'hall-a', '0.2-0.5');
	const { exposure } = closeMinutes(tally, 600 + 60 + 15);
	expect(exposure).toEqual([expect.objectContaining({ minute: 600, taskedS: 3, halts: 1 })]);
});

it('keeps driving of other robots when one halts', () => {
	let tally = addDrives(EMPTY_TALLY, [drive(605), drive(605, 'porter-02')]);
	tally = stopClock(tally, 'porter-01', 600, null, 'unseen');
	const { exposure } = closeMinutes(tally, 700);
	expect(exposure.find(({ robot }) => robot === 'porter-02')).toMatchObject({ taskedS: 1, halts: 0 });
});

it('hands out a minute once, and only when it can no longer change', () => {
	const tally = addDrives(EMPTY_TALLY, [drive(659.9)]);
	const early = closeMinutes(tally, 674);
	expect(early.exposure).toEqual([]);
	const due = closeMinutes(early.tally, 675);
	expect(due.exposure).toHaveLength(1);
	expect(closeMinutes(due.tally, 900).exposure).toEqual([]);
});

it('leaves results without enough coverage out of the mean but not out of the coverage', () => {
	let tally = addDensity(EMPTY_TALLY, [zone(1, 0.8, 8)], 600, 0.5);
	tally = addDensity(tally, [zone(null, 0.2, 1)], 600.5, 0.5);
	const { density } = closeMinutes(tally, 700);
	expect(density).toEqual([
		{ zone: 'hall-a', minute: 600, mean: 1, peak: 1, coverage: 0.5, observedAreaS: 50, personS: 4.5 }
	]);
});

it('says not measured, not zero, for a minute in which nothing was seen', () => {
	const { density } = closeMinutes(addDensity(EMPTY_TALLY, [zone(null, 0, 0)], 600, 0.5), 700);
	expect(density[0]).toMatchObject({ mean: null, peak: null, coverage: 0 });
});
