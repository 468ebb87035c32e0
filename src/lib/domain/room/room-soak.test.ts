import { describe, expect, it } from 'vitest';
import fc from 'fast-check';
fc.configureGlobal({ numRuns: 1500 });
import { computeRoom, computeRooms, computeVerdict, ROOM_DEFAULTS, type RoomPerson, type RoomQuery } from './room.ts';
import { computePenetration } from './velocity-obstacle.ts';

const person = (x: number, y: number, changes: Partial<RoomPerson> = {}): RoomPerson => ({
	x,
	y,
	vx: 0,
	vy: 0,
	radius: 0.25,
	flexibility: 0,
	...changes
});

const scene = (persons: RoomPerson[], changes: Partial<RoomQuery> = {}): RoomQuery => ({
	x: 0,
	y: 0,
	radius: 0.3,
	maxSpeed: 1.5,
	direction: 0,
	horizon: 3,
	sector: (75 * Math.PI) / 180,
	persons,
	walls: [],
	...changes
});

/** People standing evenly on a circle round the robot, one slightly left of straight ahead. */
const ring = (count: number, radius: number, flexibility: number | ((index: number) => number)) =>
	Array.from({ length: count }, (_, i) => {
		const at = 0.1 + (2 * Math.PI * i) / count;
		const f = typeof flexibility === 'number' ? flexibility : flexibility(i);
		return person(radius * Math.cos(at), radius * Math.sin(at), { flexibility: f });
	});

const rooms = (query: RoomQuery) => computeRooms(query);

describe('closed forms', () => {
	it('is full speed when nobody is there', () => {
		expect(computeRoom(scene([]))).toEqual({ speed: 1.5, velocity: { x: 1.5, y: 0 } });
	});

	it('passes beside a standing person along the tangent: v·cos(asin(R/D)), from the definition', () => {
		for (const distance of [0.7, 1.2, 3]) {
			const { speed, velocity } = computeRoom(scene([person(distance, 0)]));
			expect(speed).toBeCloseTo(1.5 * Math.cos(Math.asin(0.55 / distance)), 7);
			expect(Math.hypot(velocity!.x, velocity!.y)).toBeCloseTo(1.5, 7);
		}
	});

	it('is (gap)/τ towards a wall across the way, and does not depend on how the wall is cut up', () => {
		const wall = { ax: 1.3, ay: -9, bx: 1.3, by: 9 };
		const pieces = [-9, -1, 0, 0.5, 9].slice(1).map((by, i) => ({ ax: 1.3, ay: [-9, -1, 0, 0.5][i]!, bx: 1.3, by }));
		expect(computeRoom(scene([], { walls: [wall] })).speed).toBeCloseTo(1 / 3, 7);
		expect(computeRoom(scene([], { walls: pieces })).speed).toBeCloseTo(1 / 3, 7);
	});

	it('follows from Pythagoras where a far person cuts off the tip of the speed disc', () => {
		const centre = 4.75 / 3;
		expect(computeRoom(scene([person(4.75, 0)])).speed).toBeCloseTo(
			(1.5 ** 2 + centre ** 2 - (0.55 / 3) ** 2) / (2 * centre),
			7
		);
		expect(computeRoom(scene([person(5.06, 0)])).speed).toBe(1.5);
	});
});

describe('penetration depth', () => {
	const depth = (px: number, py: number, wx: number, wy: number) =>
		computePenetration({ x: px, y: py }, { x: wx, y: wy }, { x: 0, y: 0 }, 0.55, 3);

	it('is the least change of velocity that avoids contact, by slowing down or sideways (worked by hand)', () => {
		expect(depth(3, 0, 0.9, 0)).toBeCloseTo(0.9 - (3 - 0.55) / 3, 12);
		expect(depth(3, 0, 1.4, 0)).toBeCloseTo((1.4 * 0.55) / 3, 12);
		expect(depth(3, 0, 0.5, 1)).toBe(0);
		expect(depth(3, 0, 0.8, 0)).toBe(0);
	});

	it('counts only coming closer once discs touch, and nothing for one centre on the other', () => {
		expect(depth(0.3, 0.4, 0.5, 0)).toBeCloseTo(0.3, 12);
		expect(depth(0.3, 0.4, -0.5, 0)).toBe(0);
		expect(depth(0, 0, 0.5, 0)).toBe(0);
	});

	it('agrees with closed-form least separation: inside when, and only when, the discs come into contact', () => {
		const coordinate = fc.double({ min: -4, max: 4, noNaN: true });
		fc.assert(
			fc.property(coordinate, coordinate, coordinate, coordinate, (px, py, wx, wy) => {
				fc.pre(Math.hypot(px, py) > 0.56);
				const square = wx * wx + wy * wy;
				const time = Math.min(3, Math.max(0, square > 0 ? (px * wx + py * wy) / square : 0));
				const apart = Math.hypot(px - wx * time, py - wy * time);
				fc.pre(Math.abs(apart - 0.55) > 1e-6);
				expect(depth(px, py, wx, wy) > 0).toBe(apart < 0.55);
			})
		);
	});
});

describe('invariants', () => {
	const away = fc.double({ min: 0.15, max: 4, noNaN: true });
	const angle = fc.double({ min: -Math.PI, max: Math.PI, noNaN: true });
	const speed = fc.double({ min: -1.2, max: 1.2, noNaN: true });
	const persons = fc.array(
		fc
			.record({ away, angle, vx: speed, vy: speed, flexibility: fc.double({ min: 0, max: 0.5, noNaN: true }) })
			.map(({ away, angle, ...rest }) => person(away * Math.cos(angle), away * Math.sin(angle), rest)),
		{ maxLength: 8 }
	);
	const coordinate = fc.double({ min: -3, max: 3, noNaN: true });
	const walls = fc.array(fc.record({ ax: coordinate, ay: coordinate, bx: coordinate, by: coordinate }), {
		maxLength: 3
	});
	const factor = fc.double({ min: 1, max: 3, noNaN: true });
	const scenes = fc.tuple(persons, walls).map(([people, segments]) => scene(people, { walls: segments }));

	it('lies between 0 and the top speed, and shared is never below alone', () => {
		fc.assert(
			fc.property(scenes, (query) => {
				const { alone, shared } = rooms(query);
				expect(alone).toBeGreaterThanOrEqual(0);
				expect(shared).toBeGreaterThanOrEqual(alone);
				expect(shared).toBeLessThanOrEqual(1.5 + 1e-9);
			})
		);
	});

	it('never falls as flexibility grows', () => {
		fc.assert(
			fc.property(scenes, factor, (query, by) => {
				const softer = query.persons.map((each) => ({ ...each, flexibility: each.flexibility * by }));
				expect(computeRoom({ ...query, persons: softer }).speed).toBeGreaterThanOrEqual(
					computeRoom(query).speed - 1e-6
				);
			})
		);
	});

	it('never grows with the horizon or with an added person', () => {
		fc.assert(
			fc.property(scenes, factor, persons, (query, by, more) => {
				const room = computeRoom(query).speed;
				expect(computeRoom({ ...query, horizon: query.horizon * by }).speed).toBeLessThanOrEqual(room + 1e-6);
				const added = [...query.persons, ...more];
				expect(computeRoom({ ...query, persons: added }).speed).toBeLessThanOrEqual(room + 1e-6);
			})
		);
	});

	it('never grows with the radius, as long as the larger disc does not overlap anybody', () => {
		fc.assert(
			fc.property(scenes, fc.double({ min: 0, max: 0.3, noNaN: true }), (query, more) => {
				fc.pre(query.persons.every(({ x, y }) => Math.hypot(x, y) > 0.55 + more));
				const room = computeRoom({ ...query, walls: [] }).speed;
				expect(computeRoom({ ...query, walls: [], radius: query.radius + more }).speed).toBeLessThanOrEqual(
					room + 1e-6
				);
			})
		);
	});

	it('is unchanged by moving and turning the scene, and its velocity turns along', () => {
		fc.assert(
			fc.property(scenes, angle, coordinate, coordinate, (query, turn, dx, dy) => {
				const [cos, sin] = [Math.cos(turn), Math.sin(turn)];
				const rotate = (x: number, y: number) => ({ x: cos * x - sin * y, y: sin * x + cos * y });
				const move = (x: number, y: number) => ({ x: rotate(x, y).x + dx, y: rotate(x, y).y + dy });
				const turned: RoomQuery = {
					...query,
					...move(query.x, query.y),
					direction: query.direction + turn,
					persons: query.persons.map((each) => {
						const velocity = rotate(each.vx, each.vy);
						return { ...each, ...move(each.x, each.y), vx: velocity.x, vy: velocity.y };
					}),
					walls: query.walls.map((wall) => {
						const [a, b] = [move(wall.ax, wall.ay), move(wall.bx, wall.by)];
						return { ax: a.x, ay: a.y, bx: b.x, by: b.y };
					})
				};
				// A wall through the very centre of the robot has no side to be on.
				fc.pre(query.walls.every((wall) => distanceTo(wall) > 1e-6));
				// A hair more or less decides about discs that just touch, and about slits: such scenes are skipped.
				const hair = [1e-7, -1e-7].map((more) => computeRoom({ ...query, radius: query.radius + more }).speed);
				fc.pre(Math.abs(hair[0]! - hair[1]!) < 1e-4);
				const { speed: room, velocity } = computeRoom(turned);
				expect(Math.abs(room - computeRoom(query).speed)).toBeLessThan(1e-4);
				if (velocity) {
					const progress = velocity.x * Math.cos(turned.direction) + velocity.y * Math.sin(turned.direction);
					expect(progress).toBeCloseTo(room, 6);
				}
			})
		);
	});

	it('holds up against sampled velocities and closed-form least separation, without a velocity obstacle', () => {
		fc.assert(
			fc.property(persons, (people) => {
				const query = scene(people);
				const { speed: room, velocity } = computeRoom({
					...query,
					persons: people.map((each) => ({ ...each, flexibility: 0 }))
				});
				if (velocity) expect(clears(query, velocity.x, velocity.y, 1e-6)).toBe(true);
				for (let i = 1; i <= 30; i++) {
					for (let j = -15; j <= 15; j++) {
						const heading = (query.sector * j) / 15;
						const [x, y] = [0.05 * i * Math.cos(heading), 0.05 * i * Math.sin(heading)];
						if (x > room + 1e-6) expect(clears(query, x, y, -1e-6)).toBe(false);
					}
				}
			}),
			{ numRuns: 440 }
		);
	});
});

/** From the robot at the origin to a wall, m. */
function distanceTo({ ax, ay, bx, by }: RoomQuery['walls'][number]): number {
	const square = (bx - ax) ** 2 + (by - ay) ** 2;
	const share = square > 0 ? Math.min(1, Math.max(0, -(ax * (bx - ax) + ay * (by - ay)) / square)) : 0;
	return Math.hypot(ax + share * (bx - ax), ay + share * (by - ay));
}

/** Whether driving at (x, y) for the whole horizon keeps clear of everybody; `slack` in m. */
function clears({ persons, radius, horizon }: RoomQuery, x: number, y: number, slack: number): boolean {
	return persons.every((each) => {
		const [vx, vy] = [each.vx - x, each.vy - y];
		const square = vx * vx + vy * vy;
		const time = square > 0 ? Math.min(horizon, Math.max(0, -(each.x * vx + each.y * vy) / square)) : 0;
		const keep = Math.min(radius + each.radius, Math.hypot(each.x, each.y));
		return Math.hypot(each.x + vx * time, each.y + vy * time) >= keep - slack;
	});
}

describe('traps', () => {
	it('trap: with a short horizon, creeping up to someone counts as room', () => {
		expect(rooms(scene(ring(8, 0.9, 0), { horizon: 1 })).alone).toBeCloseTo(0.39, 2);
		expect(rooms(scene(ring(8, 0.9, 0))).alone).toBeCloseTo(0.13, 2);
	});

	it('trap: flexibility caps each change and leaves both sides open, unlike half of one change', () => {
		const { alone, shared } = rooms(scene([person(3, 0, { flexibility: 0.3 })]));
		expect(alone).toBeCloseTo(1.4746, 4);
		expect(shared).toBe(1.5);
	});

	it('trap: somebody who will run into the robot blocks every way, also from behind', () => {
		const behind = rooms(scene([person(-0.8, 0, { vx: 2.2, flexibility: 0.3 })]));
		expect(behind.alone).toBe(0);
		expect(behind.shared).toBeCloseTo(1.47, 2);
	});

	it('trap: flexibility belongs to each person', () => {
		const { alone, shared } = rooms(scene(ring(8, 0.9, (i) => (i < 2 ? 0.5 : 0))));
		expect(alone).toBeCloseTo(0.13, 2);
		expect(shared).toBeCloseTo(1.37, 2);
	});

	it('trap: walls never yield', () => {
		const box = [-0.4, 0.4].flatMap((at) => [
			{ ax: at, ay: -0.4, bx: at, by: 0.4 },
			{ ax: -0.4, ay: at, bx: 0.4, by: at }
		]);
		const { alone, shared } = rooms(scene([person(1.5, 0, { flexibility: 1 })], { walls: box }));
		expect(alone).toBeCloseTo(0.1 / 3, 6);
		expect(shared).toBe(alone);
	});

	it('trap: room shared is an upper bound: with f = 1 it leads straight through a closed ring', () => {
		expect(rooms(scene(ring(8, 0.9, 1))).shared).toBe(1.5);
	});

	it('trap: one standing person 1 cm from contact closes the sector; overlap does not block everything', () => {
		expect(rooms(scene([person(0.56, 0)])).alone).toBeLessThan(0.01);
		expect(rooms(scene([person(0.56, 0)], { sector: (80 * Math.PI) / 180 })).alone).toBeGreaterThan(0.2);
		expect(rooms(scene([person(-0.4, 0.05, { vx: 0.5 })])).alone).toBeGreaterThan(1.4);
		expect(rooms(scene([person(0.33, 0.44)])).alone).toBeCloseTo(1.2, 6);
	});

	it('trap: room can hang on a slit, so radii are to be padded before trusting "open"', () => {
		const doorway = (radius: number) => scene([person(0.6, 0.551, { radius }), person(0.6, -0.551, { radius })]);
		expect(computeRoom(doorway(0.25)).speed).toBeCloseTo(1.5, 3);
		expect(computeRoom(doorway(0.252)).speed).toBeLessThan(0.9);
	});

	it('trap: slow can be blocked where fast is free, when the robot would be overtaken', () => {
		const query = scene([person(-1.2, 0, { vx: 0.9 })]);
		expect(clears(query, 0.3, 0, 0)).toBe(false);
		expect(clears(query, 1.5, 0, 0)).toBe(true);
		expect(computeRoom(query).speed).toBe(1.5);
	});

	it('trap: a missing number is not flexibility 0, it is NaN and unseen', () => {
		const found = rooms(scene([person(2, 0, { flexibility: NaN })]));
		expect(found.alone).toBeNaN();
		expect(computeVerdict({ ...found, goSpeed: 0.25, observedShare: 1, leastObserved: 0.3 })).toBe('unseen');
		expect(computeRoom(scene([person(NaN, 0)]))).toEqual({ speed: NaN, velocity: null });
	});
});

// Common practice in the field: a planner that predicts people as if it were not there loses room at any density, and in a
// crowd that would open for it sees no way at all.
it('a predictor that lets nobody react loses room at any density, and all of it in a crowd', () => {
	/** People 1/√density apart, every other row shifted by half, walking towards the robot. */
	const oncoming = (density: number) => {
		const spacing = 1 / Math.sqrt(density);
		const rows = Array.from({ length: Math.ceil(5 / spacing) }, (_, i) => i);
		const files = Array.from({ length: 2 * Math.ceil(4 / spacing) + 1 }, (_, j) => j - Math.ceil(4 / spacing));
		return rows.flatMap((i) =>
			files.map((j) => person(1.2 + i * spacing, (j + (i % 2) / 2) * spacing + 0.05, { vx: -1, flexibility: 0.3 }))
		);
	};
	for (const density of [0.1, 0.25, 0.5, 1, 2]) {
		const { alone, shared } = rooms(scene(oncoming(density), { horizon: ROOM_DEFAULTS.horizon }));
		expect(shared - alone).toBeGreaterThan(0.1);
		expect(shared).toBeGreaterThan(ROOM_DEFAULTS.goSpeed);
		if (density >= 1) expect(alone).toBe(0);
	}
});

it('refuses a horizon that is not positive, and gives no room without speed', () => {
	expect(() => computeRoom(scene([], { horizon: 0 }))).toThrow(RangeError);
	expect(computeRoom(scene([], { maxSpeed: 0 }))).toEqual({ speed: 0, velocity: null });
});

describe('verdict', () => {
	const verdict = (alone: number | null, shared: number | null, observedShare: number | null = 1) =>
		computeVerdict({ alone, shared, goSpeed: 0.25, observedShare, leastObserved: 0.3 });

	it('is open at the go speed itself, shared or packed below', () => {
		expect(verdict(0.25, 0.25)).toBe('open');
		expect(verdict(0.24, 0.25)).toBe('shared');
		expect(verdict(0, 0.24)).toBe('packed');
	});

	it('trap: people not seen are not absent: too little observed is unseen, never open', () => {
		expect(verdict(1.5, 1.5, 0.29)).toBe('unseen');
		expect(verdict(1.5, 1.5, 0.3)).toBe('open');
		for (const share of [null, NaN]) expect(verdict(1.5, 1.5, share)).toBe('unseen');
		expect(verdict(null, null)).toBe('unseen');
		expect(verdict(NaN, 1)).toBe('unseen');
	});
});
