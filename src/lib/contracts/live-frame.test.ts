import fc from 'fast-check';
import { expect, it } from 'vitest';
import { decodeRuns, encodeRuns } from './live-frame.ts';

it('gives back any field that was encoded', () => {
	fc.assert(
		fc.property(fc.array(fc.tuple(fc.nat(255), fc.integer({ min: 1, max: 600 })), { maxLength: 8 }), (runs) => {
			const values = Uint8Array.from(runs.flatMap(([value, run]) => Array<number>(run).fill(value)));
			expect(decodeRuns(encodeRuns(values), values.length)).toEqual(values);
		})
	);
});

it('says so when a field is cut short', () => {
	expect(() => decodeRuns(encodeRuns(new Uint8Array(10)), 11)).toThrow('10 cells where 11');
});
