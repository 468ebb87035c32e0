import { describe, expect, it } from 'vitest';
import type { LiveField } from '../../contracts/live.ts';
import { UNSEEN } from './field.ts';
import { computeIsoline } from './isolines.ts';

const SIZE = 41;
const field: LiveField = {
	floor: 'f',
	server_time_ms: 0,
	x0_m: -10.25,
	y0_m: -10.25,
	cell_m: 0.5,
	cols: SIZE,
	rows: SIZE,
	max_per_m2: 2.54,
	cells: ''
};

/** Density falling off from the middle of the field: 2 − r/5 persons/m², so that it equals 1 on the circle r = 5 m. */
const cone = Uint8Array.from({ length: SIZE * SIZE }, (_, i) => {
	const x = ((i % SIZE) - 20) * 0.5;
	const y = (Math.floor(i / SIZE) - 20) * 0.5;
	return Math.max(0, Math.round((2 - Math.hypot(x, y) / 5) * 100));
});

const radii = (lines: number[]) =>
	Array.from({ length: lines.length / 2 }, (_, i) => Math.hypot(lines[2 * i] ?? 0, lines[2 * i + 1] ?? 0));

describe('computeIsoline', () => {
	it('finds the circle where a cone crosses the level, within a tenth of a cell', () => {
		const lines = computeIsoline(cone, field, 1);
		expect(lines.length).toBeGreaterThan(4 * 40);
		for (const r of radii(lines)) expect(Math.abs(r - 5)).toBeLessThan(0.05);
	});

	it('closes: every end is met by another', () => {
		const lines = computeIsoline(cone, field, 1);
		const ends = new Map<string, number>();
		for (let i = 0; i < lines.length; i += 2) {
			const key = `${lines[i]?.toFixed(6)} ${lines[i + 1]?.toFixed(6)}`;
			ends.set(key, (ends.get(key) ?? 0) + 1);
		}
		expect([...ends.values()].every((count) => count % 2 === 0)).toBe(true);
	});

	it('draws no line along the edge of what was seen', () => {
		const cells = new Uint8Array(SIZE * SIZE).fill(UNSEEN);
		for (let row = 10; row < 20; row++) cells.fill(200, row * SIZE + 10, row * SIZE + 20);
		expect(computeIsoline(cells, field, 1)).toEqual([]);
	});

	it('keeps to the side asked for', () => {
		const right = computeIsoline(cone, field, 1, (x) => x > 0);
		expect(Math.min(...right.filter((_, i) => i % 2 === 0))).toBeGreaterThan(-0.3);
		expect(right.length).toBeGreaterThan(0);
	});

	it('keeps two corners of a saddle apart', () => {
		const cells = Uint8Array.from([200, 0, 0, 200]);
		expect(computeIsoline(cells, { ...field, cols: 2, rows: 2 }, 1)).toHaveLength(8);
	});
});
