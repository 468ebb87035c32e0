/** What a simulated robot says about itself, as messages of the contract in its own map frame. */

import type { People, Pose, State } from '../../src/lib/contracts/mqtt.ts';
import type { MapFrame } from '../core/floor-world.ts';
import type { Sighting } from './sensor.ts';
import type { Vehicle } from './vehicle.ts';

const mm = (value: number): number => Math.round(value * 1000) / 1000;

/** m/s as sent: a film played fast shows everybody fast. Kept within what the contract takes. */
const speedOf = (value: number, pace: number): number => mm(Math.max(-20, Math.min(20, value * pace)));

/** m and rad by which the robot mistakes its own place; people it sees are shifted alike. */
export interface PoseError {
	readonly x: number;
	readonly y: number;
	readonly heading: number;
}

export function poseMessage(vehicle: Vehicle, error: PoseError, pace: number, t: number, seq: number): Pose {
	const { frame, vx, vy } = vehicle;
	const x = vehicle.x + error.x;
	const y = vehicle.y + error.y;
	return {
		t,
		seq,
		map: frame.name,
		x: mm(frame.x(x, y)),
		y: mm(frame.y(x, y)),
		heading: mm(frame.heading(vehicle.heading + error.heading)),
		vx: speedOf(frame.dx(vx, vy), pace),
		vy: speedOf(frame.dy(vx, vy), pace),
		speed: speedOf(vehicle.speed, pace)
	};
}

export function peopleMessage(
	frame: MapFrame,
	seen: readonly Sighting[],
	error: PoseError,
	view: {
		readonly range: number;
		readonly fieldOfView: number | null;
		readonly velocities: boolean;
		readonly pace: number;
	},
	t: number,
	seq: number
): People {
	const half = view.fieldOfView === null ? null : mm(view.fieldOfView / 2);
	return {
		t,
		seq,
		map: frame.name,
		range_m: view.range,
		...(half === null ? {} : { fov: [-half, half] as [number, number] }),
		persons: seen.map((person) => {
			const x = person.x + error.x;
			const y = person.y + error.y;
			return {
				id: person.id,
				x: mm(frame.x(x, y)),
				y: mm(frame.y(x, y)),
				...(view.velocities
					? {
							vx: speedOf(frame.dx(person.vx, person.vy), view.pace),
							vy: speedOf(frame.dy(person.vx, person.vy), view.pace)
						}
					: {}),
				sd: Math.max(0.001, mm(person.sd))
			};
		})
	};
}

const ERRORS = {
	breakdown: { code: 'drive.overheat', level: 'critical', text: 'Drive too hot, waiting to cool down.' },
	localization: { code: 'map.lost', level: 'urgent', text: 'Position lost, looking for known walls.' }
} as const;

export function stateMessage(vehicle: Vehicle, time: number, t: number, seq: number): State {
	const { task, frame, robot } = vehicle;
	const fault = vehicle.faultNow(time);
	return {
		t,
		seq,
		tasked: task !== null,
		...(task
			? {
					task: {
						id: task.id,
						goal: { x: mm(frame.x(task.goal.x, task.goal.y)), y: mm(frame.y(task.goal.x, task.goal.y)) },
						route: task.route.map(({ x, y }) => [mm(frame.x(x, y)), mm(frame.y(x, y))] as [number, number])
					}
				}
			: {}),
		mode: vehicle.isManual(time) ? 'manual' : 'automatic',
		paused: vehicle.paused,
		estop: fault === 'estop',
		charging: vehicle.phase === 'charging',
		battery: mm(vehicle.battery),
		localized: fault !== 'localization',
		errors: fault === 'breakdown' || fault === 'localization' ? [ERRORS[fault]] : [],
		software: robot.software
	};
}
