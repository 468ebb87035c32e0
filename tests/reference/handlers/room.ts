/* eslint-disable @typescript-eslint/no-explicit-any */
import { computeFlexibility } from '../../../src/lib/domain/room/flexibility.ts';
import { computeRooms, computeVerdict } from '../../../src/lib/domain/room/room.ts';
import { computePenetration } from '../../../src/lib/domain/room/velocity-obstacle.ts';

const point = ([x, y]: [number, number]) => ({ x, y });

function passableRoom(input: any) {
	const { robot } = input;
	const { alone, shared } = computeRooms({
		...point(robot.position),
		radius: robot.radius,
		maxSpeed: robot.max_speed,
		direction: Math.atan2(robot.direction[1], robot.direction[0]),
		horizon: input.horizon_s,
		sector: (input.sector_deg * Math.PI) / 180,
		persons: (input.people ?? []).map((person: any) => ({
			...point(person.position),
			vx: person.velocity[0],
			vy: person.velocity[1],
			radius: person.radius,
			flexibility: person.flexibility
		})),
		walls: (input.walls ?? []).map(([a, b]: any) => ({ ax: a[0], ay: a[1], bx: b[0], by: b[1] }))
	});
	const goSpeed = input.go_speed_m_s;
	const verdict = computeVerdict({ alone, shared, goSpeed, observedShare: 1, leastObserved: 0 });
	return { room_alone_m_s: alone, room_shared_m_s: shared, verdict };
}

function penetration(input: any) {
	const [relative, robot, person] = [input.relative_position, input.robot_velocity, input.person_velocity].map(point);
	return { penetration_m_s: computePenetration(relative!, robot!, person!, input.radius_sum, input.horizon_s) };
}

function flexibility(input: any) {
	const samples = (list: any[]) =>
		list.map(({ t, position, velocity }) => ({ time: t, ...point(position), vx: velocity?.[0], vy: velocity?.[1] }));
	const found = computeFlexibility(
		input.tracks.map((track: any) => ({ id: track.id, samples: samples(track.samples) })),
		input.robots.map((robot: any) => ({ samples: samples(robot.samples) })),
		{ horizonS: input.horizon_s, nearM: input.near_m, quantile: input.quantile }
	);
	return {
		residuals_m_s: found.residuals,
		windows: found.residuals.length,
		tracks: found.tracks,
		flexibility_m_s: found.flexibility
	};
}

export const handlers = { passable_room: passableRoom, penetration, flexibility };
