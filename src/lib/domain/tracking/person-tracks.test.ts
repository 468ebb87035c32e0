import { describe, expect, it } from 'vitest';
import {
	confirmedTracks,
	expireTracks,
	predictTrack,
	startTracker,
	stepTracker,
	type PersonMeasurement,
	type PersonScan,
	type TrackerState
} from './person-tracks.ts';

const person = (localId: string, x: number, y: number, sd = 0.05): PersonMeasurement => ({
	localId,
	x,
	y,
	vx: null,
	vy: null,
	sd
});
const everywhere = () => true;
const nowhere = () => false;
const scan = (
	robot: string,
	time: number,
	persons: PersonMeasurement[],
	sees: PersonScan['sees'] = everywhere
): PersonScan => ({ robot, time, persons, sees });
const run = (scans: readonly PersonScan[], start: TrackerState = startTracker()) =>
	scans.reduce((state, one) => stepTracker(state, one), start);
/** Times of n scans `every` s apart, from `from` on. */
const times = (from: number, n: number, every: number) => Array.from({ length: n }, (_, k) => from + k * every);

describe('confirmation', () => {
	it('a single glitch is nobody', () => {
		const state = run([scan('a', 0, [person('1', 0, 0)]), ...times(0.2, 3, 0.2).map((t) => scan('a', t, []))]);
		expect(confirmedTracks(state, 0.6)).toEqual([]);
		expect(state.tracks).toEqual([]);
	});

	it('two sightings are somebody, at 2.5 Hz too', () => {
		const state = run([0, 0.4].map((t) => scan('a', t, [person('1', t, 0)])));
		expect(confirmedTracks(state, 0.4)).toHaveLength(1);
	});

	it('two sightings more than 1.2 s apart are not', () => {
		const state = run([0, 1.3].map((t) => scan('a', t, [person('1', 0, 0)], nowhere)));
		expect(confirmedTracks(state, 1.3)).toEqual([]);
	});
});

describe('several robots', () => {
	it('first see a person in the same instant: one track', () => {
		const state = run(['a', 'b', 'c'].map((robot, k) => scan(robot, 5, [person('1', 0.04 * k, 0)])));
		expect(state.tracks).toHaveLength(1);
		expect(state.tracks[0]!.seenBy).toHaveLength(3);
		expect(confirmedTracks(state, 5)).toHaveLength(1);
	});

	it('place a person together: two reports 0.1 m apart meet between them', () => {
		const state = run([scan('a', 5, [person('1', 0, 0, 0.1)]), scan('b', 5, [person('9', 0.1, 0, 0.1)])]);
		expect(state.tracks[0]!.x).toBeGreaterThan(0.03);
		expect(state.tracks[0]!.x).toBeLessThan(0.05);
	});

	it('one of which sees two people side by side keep them two, though the others see one', () => {
		const scans = times(0, 20, 0.1).flatMap((t) => [
			scan('a', t, [person('1', t, 0), person('2', t, 0.35)]),
			scan('b', t + 0.03, [person('x', t + 0.03, 0.15)]),
			scan('c', t + 0.06, [person('y', t + 0.06, 0.2)])
		]);
		expect(confirmedTracks(run(scans), 2)).toHaveLength(2);
	});

	it('one of which had lost its place and finds it again are left with one track', () => {
		const lost = times(0, 5, 0.2).flatMap((t) => [
			scan('a', t, [person('1', 0, 0)]),
			scan('b', t + 0.1, [person('7', 0.9, 0)])
		]);
		const before = run(lost);
		expect(confirmedTracks(before, 1)).toHaveLength(2);
		const found = times(1, 10, 0.2).flatMap((t) => [
			scan('a', t, [person('1', 0, 0)]),
			scan('b', t + 0.1, [person('7', 0.05, 0)])
		]);
		const after = run(found, before);
		expect(confirmedTracks(after, 3)).toHaveLength(1);
		expect(after.tracks[0]!.seenBy.map(({ robot }) => robot).sort()).toEqual(['a', 'b']);
	});

	it('trap: a clock 0.3 s off is 0.42 m at 1.4 m/s, as much as the gate; with corrected times one person stays one', () => {
		const walk = (fast: number) =>
			run(
				times(0, 15, 0.2).flatMap((t) => [
					scan('a', t, [person('1', 1.4 * t, 0)]),
					// What robot b saw at t − fast carries the time t when its clock is fast.
					scan('b', t, [person('1', 1.4 * (t - fast), 0)])
				])
			);
		expect(confirmedTracks(walk(0.03), 2.8)).toHaveLength(1);
		expect(confirmedTracks(walk(0.3), 2.8)).toHaveLength(2);
	});
});

describe('names of the robots', () => {
	it('restart without anybody being born', () => {
		const state = run(times(0, 10, 0.2).map((t, k) => scan('a', t, [person(`${k}`, t, 0), person(`x${k}`, t, 1)])));
		expect(state.nextId).toBe(3);
		expect(confirmedTracks(state, 1.8)).toHaveLength(2);
	});

	it('switch between two people without the tracks switching', () => {
		const state = run(
			times(0, 10, 0.2).map((t, k) => scan('a', t, [person(k < 5 ? '1' : '2', 0, 0), person(k < 5 ? '2' : '1', 0, 1)]))
		);
		expect(state.tracks.map(({ id, y }) => [id, Math.round(y)])).toEqual([
			[1, 0],
			[2, 1]
		]);
	});

	it('used again for somebody far away are no hint', () => {
		const before = run(times(0, 5, 0.2).map((t) => scan('a', t, [person('1', 0, 0)])));
		const state = run([scan('a', 1, [person('1', 8, 8)])], before);
		expect(state.tracks).toHaveLength(2);
		expect(state.tracks[0]!.x).toBeCloseTo(0, 6);
	});

	it('tip the balance between two equally near people', () => {
		const before = run(times(0, 5, 0.2).map((t) => scan('a', t, [person('1', 0, 0), person('2', 0.2, 0)])));
		const state = run([scan('a', 1, [person('2', 0.1, 0), person('3', 5, 5)])], before);
		expect(state.tracks.find(({ id }) => id === 2)!.seenAt).toBe(1);
		expect(state.tracks.find(({ id }) => id === 1)!.seenAt).toBe(0.8);
	});

	it('two of one name in one place are one person, in two places two', () => {
		const state = run([scan('a', 0, [person('0', 0, 0), person('0', 0.01, 0), person('0', 3, 0)])]);
		expect(state.tracks).toHaveLength(2);
		expect(state.dropped).toEqual([{ robot: 'a', localId: '0', reason: 'reported_twice' }]);
	});
});

describe('people who are no longer reported', () => {
	const standing = (n: number, every = 0.1) =>
		run(times(0, n, every).map((t) => scan('a', t, [person('1', 0, 0), person('2', 3, 0)])));

	it('are gone after eight scans of a robot that sees the place', () => {
		let state = standing(10);
		const counts = times(1, 8, 0.1).map((t) => {
			state = stepTracker(state, scan('a', t, [person('2', 3, 0)]));
			return state.tracks.length;
		});
		expect(counts).toEqual([2, 2, 2, 2, 2, 2, 2, 1]);
	});

	it('are gone after 1.5 s of slow scans', () => {
		const state = standing(5, 0.4);
		const thrice = run(
			[2, 2.4, 2.8].map((t) => scan('a', t, [person('2', 3, 0)])),
			state
		);
		expect(thrice.tracks).toHaveLength(2);
		expect(run([scan('a', 3.2, [person('2', 3, 0)])], thrice).tracks).toHaveLength(1);
	});

	it('take a stated velocity as a measurement of its own', () => {
		const walking = times(0, 6, 0.2).map((t) => scan('a', t, [{ ...person('1', 1.2 * t, 0), sd: 0.1 }]));
		const stated = walking.map((each) => ({
			...each,
			persons: each.persons.map((one) => ({ ...one, vx: 1.2, vy: 0 }))
		}));
		const speedVariance = (scans: PersonScan[]) => run(scans).tracks[0]!.speedVariance;
		expect(speedVariance(stated)).toBeLessThan(speedVariance(walking) / 3);
		expect(run(stated).tracks[0]!.vx).toBeCloseTo(1.2, 1);
	});

	it('stay for two seconds where no robot can see', () => {
		const behind = (x: number) => x > 1;
		const hidden = (t: number) => scan('a', t, [person('2', 3, 0)], behind);
		const state = run(times(1, 18, 0.1).map(hidden), standing(10));
		expect(confirmedTracks(state, 2.8)).toHaveLength(2);
		expect(confirmedTracks(run(times(2.8, 3, 0.1).map(hidden), state), 3)).toHaveLength(1);
	});

	it('stay while another, slower robot still reports them', () => {
		const scans = times(0, 200, 0.05).flatMap((t, k) => [
			...(k % 8 === 0 ? [scan('slow', t, [person('1', 0, 0)])] : []),
			scan('fast', t + 0.01, [])
		]);
		// Reported every 0.4 s, missed twenty times a second by a robot for which somebody stands in the way.
		expect(confirmedTracks(run(scans), 10)).toHaveLength(1);
	});

	it('walk on at most one second, and come to rest', () => {
		const state = run(times(0, 20, 0.1).map((t) => scan('a', t, [person('1', 1.2 * t, 0)])));
		const track = state.tracks[0]!;
		const soon = predictTrack(track, 1.9 + 0.4);
		expect(soon.x).toBeCloseTo(track.x + 0.4 * track.vx, 9);
		const later = predictTrack(track, 1.9 + 1.9);
		expect(later.x).toBeCloseTo(track.x + track.vx, 9);
		expect(later).toMatchObject({ vx: 0, vy: 0 });
		expect(later.variance).toBeGreaterThan(soon.variance);
	});

	it('expire without any scan, and so do those with a time from the future', () => {
		const ahead = run([scan('b', 3600, [person('1', 9, 9)]), scan('b', 3600.1, [person('1', 9, 9)])]);
		const state = run(
			times(0, 10, 0.1).map((t) => scan('a', t, [person('1', 0, 0), person('2', 3, 0)])),
			ahead
		);
		expect(state.tracks).toHaveLength(3);
		expect(expireTracks(state, 1).tracks).toHaveLength(2);
		expect(expireTracks(state, 3).tracks).toEqual([]);
		// The robot is heard again once its clock has been put right.
		const healed = run([scan('b', 1, [person('1', 9, 9)])], expireTracks(state, 1));
		expect(healed.tracks).toHaveLength(3);
	});
});

describe('order and rubbish', () => {
	it('a scan up to 0.5 s old still counts for its people, who stay where they are now', () => {
		const before = run(times(0, 10, 0.2).map((t) => scan('a', t, [person('1', t, 0)])));
		const state = run([scan('b', 1.4, [person('1', 1.4, 0)])], before);
		expect(state.tracks).toHaveLength(1);
		expect(state.tracks[0]!.x).toBeCloseTo(before.tracks[0]!.x, 1);
		expect(state.tracks[0]!).toMatchObject({ updatedAt: 1.8, seenAt: 1.8 });
	});

	it('a scan of one second ago bears nobody twice', () => {
		const before = run(times(0, 10, 0.2).map((t) => scan('a', t, [person('1', t, 0)])));
		const state = run([scan('b', 0.8, [person('1', 0.8, 0)])], before);
		expect(state.tracks).toHaveLength(1);
		expect(state.tracks[0]!.x).toBe(before.tracks[0]!.x);
	});

	it('a scan heard twice, or long after a newer one of the same robot, changes nothing', () => {
		const before = run(times(0, 10, 0.2).map((t) => scan('a', t, [person('1', t, 0)])));
		expect(run([scan('a', 1.8, [person('1', 1.8, 0)])], before).tracks).toBe(before.tracks);
		expect(run([scan('a', 0.3, [person('5', 7, 7)])], before).tracks).toBe(before.tracks);
		expect(run([scan('a', NaN, [person('5', 7, 7)])], before).tracks).toBe(before.tracks);
	});

	it('numbers that are none are dropped and reported, the rest of the scan is used', () => {
		const state = run([
			scan('a', 0, [person('1', NaN, 0), person('2', 0, Infinity), person('3', 1, 1, NaN), person('4', 2, 2)])
		]);
		expect(state.tracks).toHaveLength(1);
		expect(state.dropped.map(({ localId, reason }) => `${localId} ${reason}`)).toEqual([
			'1 not_a_number',
			'2 not_a_number',
			'3 not_a_number'
		]);
	});

	it('leaves the state it was given alone', () => {
		const before = run(times(0, 3, 0.2).map((t) => scan('a', t, [person('1', t, 0)])));
		const copy = structuredClone(before);
		run([scan('a', 0.6, [person('1', 0.6, 0)]), scan('b', 0.6, [person('1', 0.6, 0)]), scan('a', 0.8, [])], before);
		expect(before).toEqual(copy);
	});

	it('trap: one outlier does not wreck a track', () => {
		const before = run(times(0, 20, 0.2).map((t) => scan('a', t, [person('1', t, 0)])));
		const state = run([scan('a', 4, [person('1', 4 + 1.5, 0)]), scan('a', 4.2, [person('1', 4.2, 0)])], before);
		expect(confirmedTracks(state, 4.2)).toHaveLength(1);
		expect(state.tracks[0]!.x).toBeCloseTo(4.2, 1);
		expect(state.tracks[0]!.vx).toBeCloseTo(1, 0);
	});
});

describe('people whose places are known exactly', () => {
	const SURE = 0.0005;

	it('are followed to a millimetre through sudden turns, at 2.5 and at 25 Hz', () => {
		for (const every of [0.04, 0.4]) {
			let state = startTracker();
			let [x, y] = [0, 0];
			for (let k = 0; k < 200; k += 1) {
				// 2 m/s, a new direction every 1.2 s, back and forth among them.
				const heading = [0, Math.PI, 1, -2, Math.PI / 2][Math.floor((k * every) / 1.2) % 5]!;
				x += 2 * every * Math.cos(heading);
				y += 2 * every * Math.sin(heading);
				state = stepTracker(state, scan('a', k * every, [person('1', x, y, SURE)]));
				expect(state.tracks).toHaveLength(1);
				expect(Math.hypot(state.tracks[0]!.x - x, state.tracks[0]!.y - y)).toBeLessThan(1e-3);
			}
			expect(state.nextId).toBe(2);
		}
	});

	/** 224 heads 0.1 m apart and more, in lanes that shear past each other. */
	const crowd = (t: number): [number, number][] =>
		Array.from({ length: 224 }, (_, k) => {
			const [lane, place] = [k % 14, Math.floor(k / 14)];
			const sway = 0.02 * Math.sin(2 * Math.PI * t + k);
			return [place * 0.14 + (lane % 2 === 0 ? 0.6 : -0.4) * t + sway, lane * 0.12 + 0.01 * Math.cos(3 * t + k)];
		});

	it('are all there in a dense crowd, in every scan after the second, whatever their names do', () => {
		for (const every of [0.04, 0.4]) {
			for (const name of [(k: number) => `${k}`, (k: number, n: number) => `${(k * 7 + n * 31) % 224}`]) {
				let state = startTracker();
				for (let n = 0; n < 12; n += 1) {
					const heads = crowd(n * every);
					const persons = heads.map(([x, y], k) => person(name(k, n), x, y, SURE));
					state = stepTracker(state, scan('a', n * every, persons));
					const seen = confirmedTracks(state, n * every).filter(({ seenAt }) => seenAt === n * every);
					if (n > 0) expect(seen).toHaveLength(224);
				}
			}
		}
	});

	it('are counted once, in their places, when six robots see parts of a dense crowd', () => {
		let state = startTracker();
		for (let n = 0; n < 15; n += 1) {
			const heads = crowd(n * 0.2);
			const covered = new Set<number>();
			for (let r = 0; r < 6; r += 1) {
				const inView = (x: number, y: number) => Math.hypot(x - 0.4 * r, y - 0.8) < 0.7;
				const seen = heads.map(([x, y], k) => person(`${k}`, x, y, SURE)).filter(({ x, y }) => inView(x, y));
				seen.forEach(({ localId }) => covered.add(Number(localId)));
				state = stepTracker(state, scan(`robot-${r}`, n * 0.2, seen, inView));
			}
			const now = confirmedTracks(state, n * 0.2).filter(({ seenAt }) => seenAt === n * 0.2);
			expect(now.length).toBeLessThanOrEqual(covered.size);
			if (n < 2) continue;
			const found = [...covered].filter((k) =>
				now.some(({ x, y }) => Math.hypot(x - heads[k]![0], y - heads[k]![1]) < 1e-3)
			);
			// The rest has just come into view, or is 0.1 m from somebody only another robot sees: as much as maps differ.
			expect(found.length / covered.size).toBeGreaterThan(0.95);
		}
	});
});
