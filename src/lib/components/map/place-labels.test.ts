import { describe, expect, it } from 'vitest';
import { placeLabels, type LabelWish, type Side } from './place-labels.ts';

const wish = (key: string, x: number, y = 0, must = false): LabelWish => ({
	key,
	x,
	y,
	gap: 8,
	width: 20,
	height: 12,
	must
});
const sides = (wishes: LabelWish[], before: [string, Side][] = []) =>
	placeLabels(wishes, new Map(before)).map(({ key, side }) => `${key} ${side}`);

describe('placeLabels', () => {
	it('writes a lone label to the right', () => {
		expect(placeLabels([wish('a', 100, 50)], new Map())).toEqual([{ key: 'a', side: 'right', x: 108, y: 50 }]);
	});

	it('gives way to a neighbour', () => {
		expect(sides([wish('a', 0), wish('b', 18)])).toEqual(['a left', 'b right']);
	});

	it('stays on its side while that side is free', () => {
		expect(sides([wish('a', 0)], [['a', 'above']])).toEqual(['a above']);
	});

	it('leaves out what has no room, but never what must be read', () => {
		const crowd = Array.from({ length: 12 }, (_, i) => wish(`c${i}`, (i % 4) * 9, Math.floor(i / 4) * 9));
		expect(sides(crowd).length).toBeLessThan(12);
		expect(sides([...crowd, wish('halted', 13, 9, true)]).some((label) => label.startsWith('halted'))).toBe(true);
	});

	it('stays inside the view', () => {
		const placed = placeLabels([wish('a', 190, 50, true)], new Map(), [], { width: 200, height: 100 });
		expect(placed[0]?.side).toBe('left');
	});

	it('keeps off what is written already', () => {
		const placed = placeLabels([wish('a', 100, 50)], new Map(), [{ x: 105, y: 40, w: 60, h: 20 }]);
		expect(placed[0]?.side).toBe('left');
	});
});
