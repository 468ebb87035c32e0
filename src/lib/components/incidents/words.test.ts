import { describe, expect, it } from 'vitest';
import { describeEvidence } from './words.ts';

const full = {
	persons_within_2m: 4,
	nearest_person_m: 0.62,
	density_per_m2: 1.31,
	coverage: 0.82,
	room_alone_m_s: 0,
	room_shared_m_s: 0.42
};
const words = (change: Partial<Record<keyof typeof full, number | null>>) =>
	describeEvidence({ ...full, ...change }).replaceAll('\u00a0', ' ');

describe('describeEvidence', () => {
	it('gives every number with its unit', () => {
		expect(words({})).toBe(
			'4 people within 2 m, the nearest at 0.6 m, density 1.3/m² (coverage 82 %); room alone 0.00 m/s, shared 0.42 m/s'
		);
	});

	it('says what was not measured, and never writes zero for it', () => {
		const unseen = words({
			persons_within_2m: null,
			nearest_person_m: null,
			density_per_m2: null,
			coverage: 0.12,
			room_alone_m_s: null,
			room_shared_m_s: null
		});
		expect(unseen).toBe(
			'people within 2 m not measured, density not measured (coverage 12 %); room to move not measured'
		);
		expect(unseen).not.toMatch(/\b0\b/);
	});

	it('names no nearest person where nobody is', () => {
		expect(words({ persons_within_2m: 0, nearest_person_m: 7 })).toMatch(/^0 people within 2 m, density/);
	});
});
