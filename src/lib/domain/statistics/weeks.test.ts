import fc from 'fast-check';
import { expect, it } from 'vitest';
import { weekOf } from './weeks.ts';

const at = (iso: string): number => Date.parse(iso) / 1000;
const hours = ({ start, end }: { start: number; end: number }): number => (end - start) / 3600;

it('trap "weeks are local-time weeks": 167 h in spring, 169 h in autumn (EU summer time 2026: 29 March, 25 October)', () => {
	expect(hours(weekOf(at('2026-03-28T12:00:00Z'), 'Europe/London'))).toBe(167);
	expect(hours(weekOf(at('2026-10-24T12:00:00Z'), 'Europe/London'))).toBe(169);
	expect(hours(weekOf(at('2026-06-10T12:00:00Z'), 'Europe/London'))).toBe(168);
});

it('begins on Monday at midnight of the place, not of Greenwich', () => {
	expect(weekOf(at('2026-12-01T12:00:00Z'), 'Asia/Tokyo').start).toBe(at('2026-11-29T15:00:00Z'));
	// Sunday evening in London is Monday morning in Tokyo.
	expect(weekOf(at('2026-11-29T16:00:00Z'), 'Europe/London').start).toBe(at('2026-11-23T00:00:00Z'));
	expect(weekOf(at('2026-11-29T16:00:00Z'), 'Asia/Tokyo').start).toBe(at('2026-11-29T15:00:00Z'));
});

it('gives every moment one week, and the next week begins where it ends', () => {
	const zones = fc.constantFrom('Europe/London', 'America/New_York', 'Australia/Lord_Howe', 'Asia/Kathmandu', 'UTC');
	fc.assert(
		fc.property(fc.integer({ min: at('2000-01-01'), max: at('2040-01-01') }), zones, (time, zone) => {
			const week = weekOf(time, zone);
			expect(week.start <= time && time < week.end).toBe(true);
			expect(weekOf(week.end, zone).start).toBe(week.end);
			expect(weekOf(week.start, zone)).toEqual(week);
		})
	);
});

it('says so when there is no such zone or moment', () => {
	expect(() => weekOf(0, 'Sea/Pellmouth')).toThrow('There is no time zone "Sea/Pellmouth".');
	expect(() => weekOf(NaN, 'UTC')).toThrow('A week needs a moment.');
});
