import { expect, it } from 'vitest';
import { isTurn } from './turn.ts';

const T0 = 1_800_000_000;
/** Times at which it is the robot's turn, among ticks 0.1 s apart. */
const turns = (robot: string, ticks: number, every: number): number[] => {
	let last = -Infinity;
	return Array.from({ length: ticks }, (_, k) => T0 + k / 10).filter((now) => {
		if (!isTurn(robot, last, now, every)) return false;
		last = now;
		return true;
	});
};

it('comes at once, and from then on once per beat', () => {
	for (const robot of ['t1', 'porter-007', 'ß']) {
		const times = turns(robot, 101, 0.5);
		expect(times[0]).toBe(T0);
		expect(times.length).toBeGreaterThanOrEqual(20);
		expect(times.length).toBeLessThanOrEqual(22);
		times.slice(1).forEach((time, k) => expect(time - times[k]!).toBeLessThan(0.61));
	}
});

it('is spread: of 200 robots no tick has more than twice its share', () => {
	const counts = new Map<number, number>();
	for (let k = 0; k < 200; k++) {
		for (const time of turns(`porter-${k}`, 51, 0.5).slice(1)) counts.set(time, (counts.get(time) ?? 0) + 1);
	}
	expect(Math.max(...counts.values())).toBeLessThan(80);
});

it("is nobody's twice in one instant", () => {
	expect(isTurn('t1', T0, T0, 0.5)).toBe(false);
});
