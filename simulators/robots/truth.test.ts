import { describe, expect, it } from 'vitest';
import { HaltRecorder, type HaltChange } from './truth.ts';

/** Follows `remaining(time)` for `seconds` at ten steps a second. */
function follow(
	seconds: number,
	remaining: (time: number) => number,
	expected = (_time: number) => true
): HaltChange[] {
	const recorder = new HaltRecorder();
	const changes: HaltChange[] = [];
	let travelled = 0;
	for (let i = 0; i <= seconds * 10; i++) {
		const time = i / 10;
		travelled += i === 0 ? 0 : Math.abs(remaining(time) - remaining(time - 0.1));
		const change = recorder.step({
			time,
			remaining: remaining(time),
			taskId: 'task',
			expected: expected(time),
			fault: null,
			cause: 'people',
			travelled
		});
		if (change) changes.push(change);
	}
	return changes;
}

describe('the true record of halts', () => {
	it('dates a stop to where it began and its end to where the robot drove on', () => {
		const [started, ended] = follow(50, (t) => 100 - Math.min(t, 20) - Math.max(0, t - 40));
		expect(started).toMatchObject({ type: 'started', kind: 'freeze', onset: 20 });
		expect(ended).toMatchObject({ type: 'ended', by: 'progress' });
		expect(Math.abs((ended as { at: number }).at - 40)).toBeLessThanOrEqual(0.15);
	});

	it('takes creeping at a centimetre a second for standing still', () => {
		const [started] = follow(40, (t) => 100 - Math.min(t, 20) - 0.01 * Math.max(0, t - 20));
		expect(started).toMatchObject({ type: 'started', onset: 20 });
	});

	it('knows no halt at twice the least rate, in a short stop, or where standing is planned', () => {
		expect(follow(60, (t) => 100 - 0.1 * t)).toEqual([]);
		expect(follow(40, (t) => 100 - Math.min(t, 20) - Math.max(0, t - 23.5))).toEqual([]);
		expect(
			follow(
				40,
				(t) => 100 - Math.min(t, 20),
				(t) => t < 21
			)
		).toEqual([]);
	});

	it('does not take backing off and coming back for progress', () => {
		const rocking = (t: number) => 80 + (t < 20 ? 20 - t : Math.abs(Math.sin((t - 20) / 1.5)) * 0.8);
		const changes = follow(60, rocking);
		expect(changes).toMatchObject([{ type: 'started', kind: 'dither' }]);
	});
});
