import { describe, expect, it } from 'vitest';
import type { LiveField } from '../../contracts/live.ts';
import { densityOf, paintField, unpackField, UNSEEN } from './field.ts';

const field = (cols: number, rows: number, ...runs: number[]): LiveField => ({
	floor: 'f',
	server_time_ms: 0,
	x0_m: 0,
	y0_m: 0,
	cell_m: 0.5,
	cols,
	rows,
	max_per_m2: 6,
	cells: btoa(String.fromCharCode(...runs))
});

describe('unpackField', () => {
	it('lays runs row by row', () => {
		expect([...unpackField(field(3, 2, 7, 2, 255, 3, 9, 1))]).toEqual([7, 7, 255, 255, 255, 9]);
	});

	it('takes what is missing for unseen, never for empty', () => {
		expect([...unpackField(field(2, 2, 5, 1))]).toEqual([5, UNSEEN, UNSEEN, UNSEEN]);
	});

	it('survives runs that overshoot and a broken pair', () => {
		expect([...unpackField(field(2, 1, 4, 200, 3))]).toEqual([4, 4]);
	});
});

it('unseen has no density, zero has one', () => {
	expect(densityOf(UNSEEN, 6)).toBeNaN();
	expect([densityOf(0, 6), densityOf(254, 6)]).toEqual([0, 6]);
});

describe('paintField', () => {
	const ramp = Uint8Array.from([250, 250, 250, 120, 120, 120, 10, 10, 10]);

	it('leaves unseen cells transparent and puts the lower left cell in the last row', () => {
		const source = field(1, 2, 255, 1, 0, 1);
		const image = new Uint8ClampedArray(8);
		paintField(unpackField(source), source, ramp, 3, image);
		expect([...image]).toEqual([250, 250, 250, 255, 250, 250, 250, 0]);
	});

	it('stays at the last colour beyond the end of the ramp', () => {
		const source = field(2, 1, 127, 1, 254, 1);
		const image = new Uint8ClampedArray(8);
		paintField(unpackField(source), source, ramp, 3, image);
		expect([image[0], image[4]]).toEqual([10, 10]);
	});
});
