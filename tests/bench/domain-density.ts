/** Timings of the density domain beside straightforward versions of the same computation. */

import { createFloorGrid } from '../../src/lib/domain/geometry/grid.ts';
import { intersect } from '../../src/lib/domain/geometry/clipping.ts';
import { computeArea, isInside } from '../../src/lib/domain/geometry/polygon.ts';
import type { Polygon, Ring } from '../../src/lib/domain/geometry/types.ts';
import { computeDensityField } from '../../src/lib/domain/density/field.ts';
import { kernelWeight } from '../../src/lib/domain/density/kernel.ts';
import { computeZoneVoronoi } from '../../src/lib/domain/density/voronoi.ts';

export interface Part {
	readonly name: string;
	readonly ours: () => void;
	readonly straightforward: () => void;
	readonly target_ms: number;
}

const rectangle = (x: number, y: number, width: number, height: number): Ring => [
	[x, y],
	[x + width, y],
	[x + width, y + height],
	[x, y + height]
];

/** 120 × 80 m with twelve pillars and two stands. */
const HALL: Polygon = {
	outer: rectangle(0, 0, 120, 80),
	holes: [
		...Array.from({ length: 12 }, (_, k) => rectangle(15 + 30 * (k % 4), 15 + 25 * Math.floor(k / 4), 0.8, 0.8)),
		rectangle(40, 30, 12, 6),
		rectangle(70, 42, 9, 9)
	]
};
const ZONE: Polygon = { outer: rectangle(10, 10, 100, 60), holes: [] };
const CUTOFF_M = 1.5;
const RADIUS_M = 1;

/** Numbers in [0, 1) that are the same in every run (mulberry32). */
function random(seed: number): () => number {
	let state = seed;
	return () => {
		state = (state + 0x6d2b79f5) | 0;
		let mixed = Math.imul(state ^ (state >>> 15), 1 | state);
		mixed = (mixed + Math.imul(mixed ^ (mixed >>> 7), 61 | mixed)) ^ mixed;
		return ((mixed ^ (mixed >>> 14)) >>> 0) / 4294967296;
	};
}

/** Half of them spread out, half in crowds. */
function crowd(size: number): Float64Array {
	const next = random(7);
	const points = new Float64Array(2 * size);
	for (let i = 0; i < size;) {
		const [cx, cy] = [30 + 30 * (i % 3), 25 + 30 * (i % 2)];
		const x = i % 2 ? next() * 120 : cx + 10 * (next() - 0.5);
		const y = i % 2 ? next() * 80 : cy + 10 * (next() - 0.5);
		if (!isInside(HALL, x, y)) continue;
		points[2 * i] = x;
		points[2 * i + 1] = y;
		i += 1;
	}
	return points;
}

/** Everybody against everybody, then general polygon clipping of each cell with floor and zone. */
function plainVoronoi(points: Float64Array): number {
	const floor = intersect([ZONE], [HALL]);
	let persons = 0;
	for (let i = 0; i < points.length; i += 2) {
		const [px, py] = [points[i]!, points[i + 1]!];
		let cell: [number, number][] = Array.from({ length: 64 }, (_, k) => {
			const angle = (2 * Math.PI * k) / 64;
			return [px + CUTOFF_M * Math.cos(angle), py + CUTOFF_M * Math.sin(angle)];
		});
		for (let j = 0; j < points.length; j += 2) {
			if (j !== i) cell = nearer(cell, px, py, points[j]!, points[j + 1]!);
		}
		const walkable = intersect([{ outer: cell, holes: [] }], [HALL]);
		const area = computeArea(walkable);
		if (area > 0) persons += computeArea(intersect(walkable, floor)) / area;
	}
	return persons / computeArea(floor);
}

function nearer(cell: [number, number][], px: number, py: number, qx: number, qy: number): [number, number][] {
	const excess = (x: number, y: number) => (qx - px) * (x - (px + qx) / 2) + (qy - py) * (y - (py + qy) / 2);
	return cell.flatMap(([ax, ay], k) => {
		const [bx, by] = cell[(k + 1) % cell.length]!;
		const [da, db] = [excess(ax, ay), excess(bx, by)];
		const out: [number, number][] = da <= 0 ? [[ax, ay]] : [];
		if (da * db < 0) out.push([ax + ((bx - ax) * da) / (da - db), ay + ((by - ay) * da) / (da - db)]);
		return out;
	});
}

/** Every cell against every person, no correction. */
function plainField(points: Float64Array, cols: number, rows: number, cell: number): Float32Array {
	const field = new Float32Array(cols * rows);
	for (let index = 0; index < field.length; index++) {
		const x = ((index % cols) + 0.5) * cell;
		const y = (Math.floor(index / cols) + 0.5) * cell;
		let sum = 0;
		for (let i = 0; i < points.length; i += 2) {
			sum += kernelWeight((points[i]! - x) ** 2 + (points[i + 1]! - y) ** 2, RADIUS_M);
		}
		field[index] = sum;
	}
	return field;
}

/** Parts to time; floor, grid and crowd are made here, outside what is timed. */
export function densityParts(): Part[] {
	const points = crowd(1000);
	const grid = createFloorGrid(HALL);
	const seen = new Uint8Array(grid.area.length).fill(1);
	const half = seen.map((_, index) => (index % grid.cols < grid.cols / 2 ? 1 : 0));
	return [
		{
			name: 'zone Voronoi, 1,000 persons',
			ours: () => void computeZoneVoronoi(points, HALL, [ZONE], { radius: CUTOFF_M }),
			straightforward: () => void plainVoronoi(points),
			target_ms: 5
		},
		{
			name: 'zone Voronoi over observed cells, 1,000 persons',
			ours: () => void computeZoneVoronoi(points, HALL, [ZONE], { radius: CUTOFF_M }, { grid, seen: half }),
			straightforward: () => void plainVoronoi(points),
			target_ms: 5
		},
		{
			name: 'density field 120 × 80 m at 0.5 m, 1,000 persons',
			ours: () => void computeDensityField(grid, seen, points, RADIUS_M),
			straightforward: () => void plainField(points, grid.cols, grid.rows, grid.cell),
			target_ms: 8
		}
	];
}
