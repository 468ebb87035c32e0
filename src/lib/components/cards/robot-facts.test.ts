import { describe, expect, it } from 'vitest';
import type { LiveRobot } from '../../contracts/live.ts';
import { describePose, robotFacts } from './robot-facts.ts';

const robot = (change: Partial<LiveRobot>) =>
	({
		key: 'porter-03',
		x_m: null,
		pose_age_ms: null,
		localized: null,
		tasked: null,
		goal: null,
		speed_m_s: null,
		density_per_m2: null,
		room_alone_m_s: null,
		room_shared_m_s: null,
		battery: null,
		link: 'unknown',
		clock_offset_ms: null,
		software: null,
		...change
	}) as LiveRobot;
const plain = (text: string) => text.replaceAll('\u00a0', ' ');

describe('describePose', () => {
	it('goes on ageing after the frame it came with', () => {
		const pose = robot({ pose_age_ms: 300 });
		expect(plain(describePose(pose, 10_000, 10_200))).toBe('under 2 s old');
		expect(plain(describePose(pose, 10_000, 52_000))).toBe('42 s old');
	});

	it('says when there never was one', () => {
		expect(describePose(robot({}), 0, 0)).toBe('never received');
	});
});

it('a robot nothing is known of has no numbers at all', () => {
	const words = robotFacts(robot({}), null, 0, 0).map(([, value]) => value);
	expect(words.join()).not.toMatch(/\d/);
	expect(words.every((word) => /not known|not measured|never received/.test(word))).toBe(true);
});
