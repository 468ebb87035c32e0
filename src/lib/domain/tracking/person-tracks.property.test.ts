import fc from 'fast-check';
import { expect, it } from 'vitest';
import { confirmedTracks, startTracker, stepTracker, stepTrackerAll, type PersonScan } from './person-tracks.ts';

/** A room with people at least 0.6 m apart and robots whose maps and sensors are all a little wrong. */
interface Room {
	readonly people: readonly (readonly [number, number])[];
	readonly robots: readonly {
		readonly x: number;
		readonly y: number;
		readonly range: number;
		readonly sd: number;
		readonly off: readonly [number, number];
		readonly phase: number;
	}[];
	readonly seed: number;
}

/** Normal numbers, the same for the same seed (minimal standard generator of Park & Miller 1988; sum of twelve). */
function normals(seed: number): () => number {
	let state = seed;
	const uniform = () => (state = (state * 16807) % 2147483647) / 2147483647;
	return () => Array.from({ length: 12 }, uniform).reduce((sum, u) => sum + u, -6);
}

const inside = (min: number, max: number) => fc.double({ min, max, noNaN: true });
const room: fc.Arbitrary<Room> = fc.record({
	people: fc
		.array(fc.tuple(inside(0, 8), inside(0, 8)), { minLength: 1, maxLength: 25 })
		.map((all) =>
			all.reduce<[number, number][]>(
				(kept, [x, y]) => (kept.every(([u, v]) => Math.hypot(u - x, v - y) >= 0.6) ? [...kept, [x, y]] : kept),
				[]
			)
		),
	robots: fc.array(
		fc.record({
			x: inside(0, 8),
			y: inside(0, 8),
			range: inside(2, 9),
			sd: inside(0.05, 0.1),
			off: fc.tuple(inside(-0.06, 0.06), inside(-0.06, 0.06)),
			phase: fc.constantFrom(0, 0, 0.05, 0.12)
		}),
		{ minLength: 1, maxLength: 5 }
	),
	seed: fc.integer({ min: 1, max: 2147483646 })
});

/** Two seconds at 5 Hz. */
function scansOf({ people, robots, seed }: Room): { scans: PersonScan[]; seen: number } {
	const normal = normals(seed);
	const seen = new Set<number>();
	const scans = Array.from({ length: 11 }, (_, n) =>
		robots.map(({ x, y, range, sd, off, phase }, r): PersonScan => {
			const sees = (px: number, py: number) => Math.hypot(px - x, py - y) < range;
			const persons = people.flatMap(([px, py], k) => {
				if (!sees(px, py)) return [];
				seen.add(k);
				const [mx, my] = [px + off[0] + sd * normal(), py + off[1] + sd * normal()];
				return [{ localId: `${k}`, x: mx, y: my, vx: null, vy: null, sd }];
			});
			return { robot: `robot-${r}`, time: 100 + 0.2 * n + phase, persons, sees };
		})
	).flat();
	return { scans: scans.sort((a, b) => a.time - b.time), seen: seen.size };
}

const count = (scans: readonly PersonScan[]) =>
	confirmedTracks(
		scans.reduce((state, scan) => stepTracker(state, scan), startTracker()),
		102.2
	).length;

const FIXED = { seed: 20, numRuns: 60 };

it('counts everybody once, under any overlap of robots', () => {
	fc.assert(
		fc.property(room, (one) => {
			const { scans, seen } = scansOf(one);
			expect(count(scans)).toBe(seen);
		}),
		FIXED
	);
});

it('counts the same in whatever order robots are heard within an instant', () => {
	fc.assert(
		fc.property(room, (one) => {
			const { scans } = scansOf(one);
			const turned = [...scans].reverse().sort((a, b) => a.time - b.time);
			expect(count(turned)).toBe(count(scans));
		}),
		FIXED
	);
});

it('counts the same wherever the floor lies and however it is turned', () => {
	fc.assert(
		fc.property(room, inside(-500, 500), inside(-500, 500), inside(0, 6.28), (one, dx, dy, angle) => {
			const { scans } = scansOf(one);
			const [c, s] = [Math.cos(angle), Math.sin(angle)];
			const moved = scans.map((scan) => ({
				...scan,
				persons: scan.persons.map((p) => ({ ...p, x: c * p.x - s * p.y + dx, y: s * p.x + c * p.y + dy })),
				sees: (x: number, y: number) => scan.sees(c * (x - dx) + s * (y - dy), c * (y - dy) - s * (x - dx))
			}));
			expect(count(moved)).toBe(count(scans));
		}),
		FIXED
	);
});

it('counts the same whatever robots call themselves and the people', () => {
	fc.assert(
		fc.property(room, fc.string(), (one, prefix) => {
			const { scans } = scansOf(one);
			const renamed = scans.map((scan) => ({
				...scan,
				robot: `${prefix}${scan.robot}`,
				persons: scan.persons.map((p) => ({ ...p, localId: `${prefix}${p.localId}` }))
			}));
			const nameless = scans.map((scan, n) => ({
				...scan,
				persons: scan.persons.map((p, k) => ({ ...p, localId: `${n}/${k}` }))
			}));
			expect(count(renamed)).toBe(count(scans));
			expect(count(nameless)).toBe(count(scans));
		}),
		FIXED
	);
});

it('knows the same after a batch as after its scans one by one, and leaves what it was given alone', () => {
	fc.assert(
		fc.property(room, fc.array(fc.integer({ min: 1, max: 12 }), { minLength: 1 }), (one, sizes) => {
			const { scans } = scansOf(one);
			const single = scans.reduce((state, scan) => stepTracker(state, scan), startTracker());
			let batched = startTracker();
			for (let from = 0, k = 0; from < scans.length; k += 1) {
				const given = structuredClone(batched);
				const size = sizes[k % sizes.length]!;
				const next = stepTrackerAll(batched, scans.slice(from, from + size));
				expect(batched).toEqual(given);
				batched = next;
				from += size;
			}
			expect(batched).toEqual(single);
		}),
		FIXED
	);
});

it('knows the same when it is told how far a robot sees', () => {
	fc.assert(
		fc.property(room, (one) => {
			const { scans } = scansOf(one);
			const told = scans.map((scan) => {
				const { x, y, range } = one.robots[Number(scan.robot.slice('robot-'.length))]!;
				return { ...scan, reach: { x, y, radius: range } };
			});
			expect(stepTrackerAll(startTracker(), told)).toEqual(stepTrackerAll(startTracker(), scans));
		}),
		FIXED
	);
});
