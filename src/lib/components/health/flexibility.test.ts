import { expect, it } from 'vitest';
import { flexibilityInWords } from './flexibility.ts';

it('names the windows behind a learned value and the noise beside it', () => {
	const words = flexibilityInWords({ value_m_s: 0.341, n: 812, learned: true, noise_floor_m_s: 0.2066 });
	expect(words).toBe(
		'By 0.34\u00a0m/s, learned from 812 windows of people walking near a robot. Inaccuracy of the tracks alone would give 0.21\u00a0m/s.'
	);
});

it('says that the default is used while too little is known', () => {
	const words = flexibilityInWords({ value_m_s: 0.3, n: 1, learned: false, noise_floor_m_s: 0.2 });
	expect(words).toMatch(/^Not known yet \(1 window .*: the default of 0.30\u00a0m\/s is used\.$/);
});
