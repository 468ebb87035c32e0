import { describe, expect, it } from 'vitest';
import { age, clockOffset, clockTime, dayTime, density, people, share, speed, utcTime, zoneName } from './format.ts';

describe('missing values', () => {
	it('are words, never zero or a dash', () => {
		expect([density(null), density(NaN), speed(null), share(null), clockOffset(null)]).toEqual([
			'not measured',
			'not measured',
			'not measured',
			'not known',
			'not known'
		]);
	});

	it('differ from a measured zero', () => {
		expect([density(0), speed(0), share(0)]).toEqual(['0.0/m²', '0.00\u00a0m/s', '0\u00a0%']);
	});
});

it('does not round a thin crowd to an empty floor', () => {
	expect([density(0.01), density(0.05), density(1.2847)]).toEqual(['under 0.1/m²', '0.1/m²', '1.3/m²']);
});

it('writes ages in the two largest units', () => {
	const ages = [-5, 999, 59_999, 60_000, 185_000, 3_600_000, 7_830_000, 97_200_000];
	expect(ages.map((ms) => age(ms).replaceAll('\u00a0', ' '))).toEqual([
		'0 s',
		'0 s',
		'59 s',
		'1 min 00 s',
		'3 min 05 s',
		'1 h 00 min',
		'2 h 10 min',
		'1 d 3 h'
	]);
});

it('says which way a clock is off', () => {
	expect([20, 430, -12_000, 7_200_000].map((ms) => clockOffset(ms).replaceAll('\u00a0', ' '))).toEqual([
		'in step',
		'0.4 s ahead',
		'12.0 s behind',
		'2 h 00 min ahead'
	]);
});

it('counts one person in the singular', () => {
	expect([people(1), people(0), people(4)]).toEqual(['1\u00a0person', '0\u00a0people', '4\u00a0people']);
});

describe('times', () => {
	const summer = Date.UTC(2026, 6, 14, 12, 3, 12);

	it('are the venue’s wall clock, with summer time', () => {
		expect(clockTime(summer, 'Europe/London')).toBe('13:03:12');
		expect(zoneName(summer, 'Europe/London')).toBe('BST');
		expect(zoneName(Date.UTC(2026, 0, 14), 'Europe/London')).toBe('GMT');
	});

	it('write midnight as 00, not 24', () => {
		expect(clockTime(Date.UTC(2026, 0, 14, 0, 0, 5), 'UTC')).toBe('00:00:05');
	});

	it('carry the day where the day is not today’s', () => {
		expect(dayTime(summer, 'UTC')).toMatch(/^Tue.* 14 Jul.*12:03$/);
	});

	it('have their UTC twin', () => {
		expect(utcTime(summer)).toBe('2026-07-14 12:03:12 UTC');
	});
});
