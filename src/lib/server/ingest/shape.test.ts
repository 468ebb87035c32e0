import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { z } from 'zod';
import { CHANNELS } from '../../contracts/mqtt.ts';
import { compileShape } from './shape.ts';

const T = 1_800_000_000_000;
/** One message per channel that uses every field. */
const FULL = {
	pose: { t: T, seq: 1, map: 'g', x: 1, y: 2, heading: 0, vx: 1, vy: -1, speed: 1, cov: [0.1, -0.01, 0.1] },
	people: {
		t: T,
		seq: 1,
		map: 'g',
		range_m: 8,
		fov: [-1, 1],
		blocked: [
			[0, 0],
			[1, 0],
			[1, 1]
		],
		persons: [
			{ id: 'a', x: 1, y: 2, vx: 0.1, vy: 0.2, sd: 0.1 },
			{ id: 7, x: 1, y: 2 }
		]
	},
	state: {
		t: T,
		seq: 1,
		tasked: true,
		task: { id: 't', goal: { x: 1, y: 2 }, route: [[1, 2]] },
		mode: 'automatic',
		paused: false,
		estop: false,
		charging: false,
		battery: 0.5,
		localized: true,
		errors: [{ code: 'c', level: 'urgent', text: '' }],
		software: '1'
	},
	connection: { t: T, status: 'lost' },
	answer: { id: 'c', status: 'done', text: '' }
} as const;
const channels = Object.keys(FULL) as (keyof typeof FULL)[];

describe.each(channels)('%s', (channel) => {
	const { schema } = CHANNELS[channel];
	const fits = compileShape(schema);

	it('waves a good message through', () => {
		expect(fits(FULL[channel])).toBe(true);
	});

	it('waves nothing through that the contract refuses: any one value replaced by anything', () => {
		const edges = fc.constantFrom(
			-1,
			0,
			0.5,
			1,
			64,
			1e5,
			1e5 + 1,
			1e6,
			-1e9,
			T,
			T * 1e3,
			2 ** 53,
			Infinity,
			NaN,
			'',
			'x'.repeat(65)
		);
		const anything = fc.oneof(edges, fc.jsonValue(), fc.constant(undefined));
		let waved = 0;
		fc.assert(
			fc.property(fc.nat(), anything, (at, value) => {
				const places = paths(FULL[channel]);
				const message = replace(FULL[channel], places[at % places.length]!, value);
				if (!fits(message)) return;
				waved++;
				expect(schema.safeParse(message).success).toBe(true);
			}),
			{ numRuns: 3000 }
		);
		expect(waved).toBeGreaterThan(0);
	});
});

it('refuses to guess about a contract it does not understand', () => {
	expect(() => compileShape(z.object({ a: z.email() }))).toThrow(/format/);
	expect(() => compileShape(z.record(z.string(), z.number()))).toThrow(/propertyNames/);
	expect(() => compileShape(z.null())).toThrow(/type "null"/);
});

/** Paths to every value in a tree, inner ones too. */
function paths(value: unknown, path: string[] = []): string[][] {
	if (value === null || typeof value !== 'object') return [path];
	const inner = Object.entries(value).flatMap(([key, item]) => paths(item, [...path, key]));
	return path.length === 0 ? inner : [path, ...inner];
}

/** A copy of `tree` with the value at `path` replaced. */
function replace(tree: unknown, [key, ...rest]: string[], value: unknown): unknown {
	if (key === undefined) return value;
	const copy = (Array.isArray(tree) ? [...tree] : { ...(tree as object) }) as Record<string, unknown>;
	copy[key] = replace(copy[key], rest, value);
	return copy;
}
