import type { RobotList } from '$lib/contracts/api';
import { api } from '$lib/server/http/problem';
import { requireRole } from '$lib/server/http/require-role';
import { readRobots, type StoredRobot } from '$lib/server/repositories/robots';
import type { LiveFrame } from '$lib/contracts/live';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = api(async ({ locals }) => {
	requireRole(locals, 'display', 'read');
	const { db, hub } = locals.app;
	const frames = hub.latestFrames();
	const robots = (await readRobots(db)).map((stored) => describe(stored, frames));
	return Response.json({ robots } satisfies RobotList);
});

function describe({ venue, robot }: StoredRobot, frames: readonly LiveFrame[]): RobotList['robots'][number] {
	const { key, mark, model } = robot;
	const frame = frames.find((frame) => frame.venue === venue && frame.robots.some((live) => live.key === key));
	return {
		venue,
		key,
		mark,
		model: {
			key: model.key,
			name: model.name,
			letter: model.letter,
			length_m: model.length,
			width_m: model.width,
			radius_m: model.radius,
			max_speed_m_s: model.maxSpeed
		},
		floor: frame?.floor ?? null,
		live: frame?.robots.find((live) => live.key === key) ?? null
	};
}
