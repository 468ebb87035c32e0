import { expect, it } from 'vitest';
import type { LiveZone } from '../../contracts/live.ts';
import { describeLevel, zoneFacts } from './zone-facts.ts';

const zone: LiveZone = {
	key: 'foyer',
	name: 'Foyer',
	density_per_m2: null,
	classic_per_m2: null,
	coverage: 0,
	observed_m2: 0,
	persons: 0,
	level: null,
	scheme: 'fruin_walkway',
	threshold_per_m2: null,
	above_threshold: false,
	private: false
};

it('an unobserved zone is not an empty one', () => {
	const facts = new Map(zoneFacts(zone));
	expect([facts.get('Density'), facts.get('Level of service'), facts.get('Seen now')]).toEqual([
		'not measured',
		'not measured',
		'not measured'
	]);
});

it('a level names its scheme', () => {
	expect(describeLevel({ ...zone, level: 'C' })).toBe('C (Fruin, walkway)');
});

it('a private zone tells nothing about people', () => {
	expect(
		zoneFacts({ ...zone, private: true, persons: 7, density_per_m2: 2 })
			.flat()
			.join()
	).not.toMatch(/\d/);
});
