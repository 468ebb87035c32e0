import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { loadHandlers, readCases, runCases } from '../reference/check.ts';
import { differences } from '../reference/compare.ts';

const PACK = fileURLToPath(new URL('../../../shared/reference/', import.meta.url));
const present = existsSync(PACK);
if (!present) console.log('The reference pack is not here (../shared/reference), so its cases are not run.');

describe.runIf(present)('the reference pack', () => {
	it('passes whole, every kind known', { timeout: 120_000 }, async () => {
		const tallies = runCases(readCases(PACK), await loadHandlers());
		expect(tallies.flatMap(({ kind, complaints }) => complaints.map((complaint) => `${kind} ${complaint}`))).toEqual(
			[]
		);
		expect(tallies.reduce((sum, { passed }) => sum + passed, 0)).toBeGreaterThan(700);
	});
});

describe('the check itself', () => {
	it('fails a kind nobody handles, and a handler that throws', () => {
		const broken = new Map([
			[
				'broken',
				() => {
					throw new Error('no');
				}
			]
		]);
		const cases = ['unheard_of', 'broken'].map((kind) => ({ id: kind, kind, input: {}, expected: { a: 1 } }));
		expect(runCases(cases, broken)).toMatchObject([
			{ kind: 'unheard_of', passed: 0, total: 1 },
			{ kind: 'broken', passed: 0, total: 1 }
		]);
	});

	it('tells a number outside its tolerance, a missing key, null from zero, and a short list', () => {
		expect(differences({ a: 1.001 }, { a: 1 }, { abs: 1e-3, rel: 1e-3 })).toEqual([]);
		expect(differences({ a: 1.1 }, { a: 1 }, { abs: 1e-3, rel: 1e-3 })).toHaveLength(1);
		expect(differences({}, { a: 1 }, {})).toEqual(['a is missing, expected 1']);
		expect(differences({ a: 0 }, { a: null }, {})).toHaveLength(1);
		expect(differences({ a: null }, { a: 0 }, {})).toHaveLength(1);
		expect(differences({ a: Infinity }, { a: 'Infinity' }, {})).toEqual([]);
		expect(differences({ a: [1] }, { a: [1, 2] }, {})).toHaveLength(1);
		expect(differences({ a: NaN }, { a: 1 }, { abs: 10 })).toHaveLength(1);
	});
});
