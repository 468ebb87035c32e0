/* eslint-disable @typescript-eslint/no-explicit-any */
import { computeGridProgress } from '../../../src/lib/domain/room/orca-solve.ts';
import { computeOrcaRoom } from '../../../src/lib/domain/room/orca.ts';

/** The reference gives a lower bound on a grid of 1 mm/s beside the exact progress. */
const GRID_M_S = 0.001;

const pair = (point: { x: number; y: number } | null) => point && [point.x, point.y];

function agent({ position, velocity, radius }: any) {
	return { x: position[0], y: position[1], vx: velocity[0], vy: velocity[1], radius };
}

function roomToMove({ robot, people, horizon_s, step_s }: any) {
	const [px, py] = robot.preferred_velocity;
	const solve = (share: number) => {
		const room = computeOrcaRoom({
			robot: agent(robot),
			persons: (people ?? []).map(agent),
			preferredVelocity: { x: px, y: py },
			maxSpeed: robot.max_speed,
			horizon: horizon_s,
			step: step_s,
			share
		});
		const direction = { x: px / Math.hypot(px, py), y: py / Math.hypot(px, py) };
		const answer = {
			half_planes: room.halfPlanes.map(({ point, normal, insideObstacle }) => ({
				point: pair(point),
				normal: pair(normal),
				inside_vo: insideObstacle
			})),
			feasible: room.feasible,
			max_progress_m_s: room.progress,
			velocity: pair(room.velocity),
			nearest_velocity: pair(room.nearestVelocity),
			nearest_progress_m_s: room.nearestProgress,
			least_violation_m_s: room.leastViolation,
			grid_1mm_progress_m_s: computeGridProgress(room.halfPlanes, direction, robot.max_speed, GRID_M_S)
		};
		return { answer, tied: room.halfPlanes.some(({ tied }) => tied) };
	};
	const [whole, half] = [solve(1), solve(0.5)];
	return { alpha_1: whole.answer, 'alpha_0.5': half.answer, tie_broken_to_right_leg: whole.tied || half.tied };
}

export const handlers = { room_to_move: roomToMove };
