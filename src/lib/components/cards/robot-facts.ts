/** What is known of a robot, in words: the same on its card and in the table. */

import type { Condition, LiveRobot } from '../../contracts/live.ts';
import { age, clockOffset, density, share, speed } from '../ui/format.ts';

export const CONDITION_WORDS: Readonly<Record<Condition, string>> = {
	working: 'working',
	idle: 'idle, no task',
	waiting: 'waiting as planned',
	paused: 'paused',
	charging: 'charging',
	manual: 'driven by hand',
	halted: 'halted',
	fault: 'fault',
	silent: 'silent'
};

/** A pose older than this is called old, ms: robots send several a second. Chosen by us. */
const OLD_POSE_MS = 2000;

/** ms since the last pose, at server time `now`; null when none was ever received. */
export const poseAgeMs = (robot: LiveRobot, frameMs: number, now: number): number | null =>
	robot.pose_age_ms === null ? null : Math.max(0, robot.pose_age_ms + Math.max(0, now - frameMs));

/** `under 2 s old`, `42 s old` or `never received`; fresh positions do not count tenths, or every row would flicker. */
export function describePose(robot: LiveRobot, frameMs: number, now: number): string {
	const ms = poseAgeMs(robot, frameMs, now);
	if (ms === null) return 'never received';
	return ms < OLD_POSE_MS ? 'under 2\u00a0s old' : `${age(ms)} old`;
}

/** Room to move as two speeds toward the goal, or one phrase when it was not evaluated. */
export function describeRoom({ room_alone_m_s: alone, room_shared_m_s: shared }: LiveRobot): string {
	return alone === null && shared === null ? 'not measured' : `alone ${speed(alone)}, shared ${speed(shared)}`;
}

const yesNo = (value: boolean | null, yes: string, no: string) => (value === null ? 'not known' : value ? yes : no);

/** @param zoneName name of the zone it is in; null outside all zones */
export function robotFacts(
	robot: LiveRobot,
	zoneName: string | null,
	frameMs: number,
	now: number
): [string, string][] {
	return [
		['Where', zoneName ?? (robot.x_m === null ? 'not known' : 'outside all zones')],
		['Position', describePose(robot, frameMs, now)],
		['Localised', yesNo(robot.localized, 'yes', 'no')],
		['Task', yesNo(robot.tasked, robot.goal ? 'on its way to a goal' : 'has one', 'none')],
		['Speed', speed(robot.speed_m_s)],
		['Density around', density(robot.density_per_m2)],
		['Room to move', describeRoom(robot)],
		['Battery', robot.battery === null ? 'not known' : share(robot.battery)],
		['Link', robot.link === 'unknown' ? 'not known' : robot.link],
		['Its clock', clockOffset(robot.clock_offset_ms)],
		['Software', robot.software ?? 'not known']
	];
}
