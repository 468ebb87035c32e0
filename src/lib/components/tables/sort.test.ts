import { describe, expect, it } from 'vitest';
import { keepOrder, sortRows } from './sort.ts';

const values = (list: (number | string | null)[], descending = false) => sortRows(list, (value) => value, descending);

describe('sortRows', () => {
	it('puts what is not known last in both directions', () => {
		expect(values([2, null, 1])).toEqual([1, 2, null]);
		expect(values([2, null, 1], true)).toEqual([2, 1, null]);
	});

	it('reads the numbers inside names', () => {
		expect(values(['P10', 'P9', 'P2'])).toEqual(['P2', 'P9', 'P10']);
	});

	it('leaves equals in the order they had', () => {
		const rows = [
			{ k: 'a', v: 1 },
			{ k: 'b', v: 1 },
			{ k: 'c', v: 0 }
		];
		expect(sortRows(rows, ({ v }) => v, true).map(({ k }) => k)).toEqual(['a', 'b', 'c']);
	});
});

it('keepOrder holds rows still and appends the new', () => {
	expect(keepOrder(['d', 'a', 'b', 'c'], (name) => name, ['c', 'b', 'a'])).toEqual(['c', 'b', 'a', 'd']);
});
