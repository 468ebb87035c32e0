import { expect, it } from 'vitest';
import fc from 'fast-check';
import { assignCauseGroup, type CauseGroup, type HaltPlace } from './cause-groups.ts';

const halt = (id: string, x: number, onset: number, floor = 'ground'): HaltPlace => ({ id, floor, x, y: 0, onset });

function assign(halts: HaltPlace[]): string[] {
	let groups: readonly CauseGroup[] = [];
	return halts.map((each) => {
		const assigned = assignCauseGroup(groups, each);
		groups = assigned.groups;
		return assigned.group;
	});
}

it('puts simultaneous halts near each other into one group', () => {
	expect(assign([halt('a', 0, 0), halt('b', 10, 20)])).toEqual(['cause-a', 'cause-a']);
});

it('keeps halts apart that are farther away, later, or on another floor', () => {
	expect(assign([halt('a', 0, 0), halt('b', 10.1, 0), halt('c', -1, 20.5), halt('d', 0, 0, 'gallery')])).toEqual([
		'cause-a',
		'cause-b',
		'cause-c',
		'cause-d'
	]);
});

it('takes a halt that was noticed first but began later', () => {
	expect(assign([halt('a', 0, 15), halt('b', 3, 0)])).toEqual(['cause-a', 'cause-a']);
});

it('grows with its members, and prefers the earlier of two groups', () => {
	expect(assign([halt('a', 0, 0), halt('b', 18, 5), halt('c', 9, 10)])).toEqual(['cause-a', 'cause-b', 'cause-a']);
});

it('leaves a robot that was never seen anywhere by itself, and knows a halt again', () => {
	expect(assign([{ ...halt('a', 0, 0), x: null, y: null }, halt('b', 0, 0), halt('b', 0, 0)])).toEqual([
		'cause-a',
		'cause-b',
		'cause-b'
	]);
});

it('forgets groups long past, so that the list stays bounded', () => {
	let groups: readonly CauseGroup[] = [];
	for (let i = 0; i < 500; i++) groups = assignCauseGroup(groups, halt(`h${i}`, (i % 7) * 50, i * 30)).groups;
	expect(groups.length).toBeLessThan(10);
});

it('gives every halt exactly one group of its own floor, deterministically', () => {
	const places = fc.uniqueArray(
		fc.record({
			id: fc.string({ minLength: 1 }),
			floor: fc.constantFrom('ground', 'gallery'),
			x: fc.double({ min: 0, max: 60, noNaN: true }),
			y: fc.double({ min: 0, max: 60, noNaN: true }),
			onset: fc.double({ min: 0, max: 90, noNaN: true })
		}),
		{ selector: (place) => place.id, maxLength: 20 }
	);
	fc.assert(
		fc.property(places, (halts) => {
			const groups = assign(halts);
			expect(assign(halts)).toEqual(groups);
			groups.forEach((group, i) => {
				const first = halts.find((other) => `cause-${other.id}` === group);
				expect(first?.floor).toBe(halts[i]!.floor);
			});
		})
	);
});
