/**
 * Optimal reciprocal collision avoidance: half-planes of permitted velocities, and the progress they leave.
 *
 * van den Berg, Guy, Lin & Manocha 2011, Reciprocal n-body collision avoidance (from memory). Kept beside room alone and
 * shared as the published yardstick. It answers another question: the half-planes depend on the robot's velocity now, and
 * α splits one and the same change however large, so α = ½ is not "people yield" and may mean less room.
 */

import type { Point } from '../geometry/types.ts';
import { findBestProgress, findLeastViolation, findNearest } from './orca-solve.ts';

export interface OrcaAgent {
	readonly x: number;
	readonly y: number;
	readonly vx: number;
	readonly vy: number;
	/** m */
	readonly radius: number;
}

/** Permitted are the velocities w with (w − point)·normal ≥ 0. */
interface HalfPlane {
	readonly point: Point;
	/** Unit vector */
	readonly normal: Point;
	/** Whether the velocities now lead to contact within the horizon. */
	readonly insideObstacle: boolean;
	/** Whether the nearest way out was a tie; then the right-hand leg (clockwise from the person) was taken. */
	readonly tied: boolean;
}

export interface OrcaQuery {
	readonly robot: OrcaAgent;
	readonly persons: readonly OrcaAgent[];
	/** m/s */
	readonly preferredVelocity: Point;
	/** m/s */
	readonly maxSpeed: number;
	/** s, > 0: how long velocities must stay clear */
	readonly horizon: number;
	/** s, > 0: control step, within which an overlap is to be left */
	readonly step: number;
	/** Share of the change the robot takes: 1 everything (people who stand take none), ½ half of it */
	readonly share: number;
}

export interface OrcaRoom {
	readonly halfPlanes: readonly HalfPlane[];
	/** False when no velocity satisfies everybody: a state of its own, not progress 0. */
	readonly feasible: boolean;
	/** m/s along the preferred direction, may be negative (has to back off); null when infeasible or without a direction */
	readonly progress: number | null;
	/** The velocity with that progress; null when there are several */
	readonly velocity: Point | null;
	/** The permitted velocity nearest to the preferred one, and its progress; null when infeasible */
	readonly nearestVelocity: Point | null;
	readonly nearestProgress: number | null;
	/** m/s by which the best velocity violates the worst half-plane; null when feasible */
	readonly leastViolation: number | null;
}

/**
 * Half-planes and the room they leave. The progress can be met by a sidestep: it is not straight-line clearance, and a robot
 * that cannot drive sideways has less. Cost grows with the cube of the persons, and with their fourth power when infeasible.
 * @throws RangeError when horizon or step are not positive
 */
export function computeOrcaRoom(query: OrcaQuery): OrcaRoom {
	const { robot, persons, preferredVelocity, maxSpeed } = query;
	if (!(query.horizon > 0 && query.step > 0)) throw new RangeError('Horizon and step must be positive.');
	const halfPlanes = persons.map((person) => computeHalfPlane(robot, person, query));
	const speed = Math.hypot(preferredVelocity.x, preferredVelocity.y);
	const direction = speed > 0 ? { x: preferredVelocity.x / speed, y: preferredVelocity.y / speed } : null;
	const nearest = findNearest(halfPlanes, preferredVelocity, maxSpeed);
	if (!nearest) {
		const none = { progress: null, velocity: null, nearestVelocity: null, nearestProgress: null };
		return { halfPlanes, feasible: false, ...none, leastViolation: findLeastViolation(halfPlanes, maxSpeed) };
	}
	const best = direction && findBestProgress(halfPlanes, direction, maxSpeed);
	return {
		halfPlanes,
		feasible: true,
		progress: best?.progress ?? null,
		velocity: best?.velocity ?? null,
		nearestVelocity: nearest,
		nearestProgress: direction && nearest.x * direction.x + nearest.y * direction.y,
		leastViolation: null
	};
}

function computeHalfPlane(
	robot: OrcaAgent,
	person: OrcaAgent,
	{ horizon, step, share }: Pick<OrcaQuery, 'horizon' | 'step' | 'share'>
): HalfPlane {
	const p = { x: person.x - robot.x, y: person.y - robot.y };
	const v = { x: robot.vx - person.vx, y: robot.vy - person.vy };
	const reach = robot.radius + person.radius;
	const overlaps = Math.hypot(p.x, p.y) < reach - 1e-12;
	const out = overlaps ? leaveOverlap(p, v, reach, step) : leaveObstacle(p, v, reach, horizon);
	return {
		point: { x: robot.vx + share * (out.x - v.x), y: robot.vy + share * (out.y - v.y) },
		normal: out.normal,
		insideObstacle: out.inside,
		tied: out.tied
	};
}

interface WayOut extends Point {
	readonly normal: Point;
	readonly inside: boolean;
	readonly tied: boolean;
}

/** Overlapping discs: nearest point of the circle of velocities that just separate them within one control step. */
function leaveOverlap(p: Point, v: Point, reach: number, step: number): WayOut {
	const centre = { x: p.x / step, y: p.y / step };
	const away = { x: v.x - centre.x, y: v.y - centre.y };
	const length = Math.hypot(away.x, away.y);
	const apart = Math.hypot(p.x, p.y);
	const radius = reach / step;
	// On the centre itself every direction is as near; the one away from the person is taken.
	const normal =
		length > 0
			? { x: away.x / length, y: away.y / length }
			: apart > 0
				? { x: -p.x / apart, y: -p.y / apart }
				: { x: 1, y: 0 };
	const onCircle = { x: centre.x + radius * normal.x, y: centre.y + radius * normal.y };
	return { ...onCircle, normal, inside: length < radius, tied: false };
}

/** Nearest point to v on the boundary of the truncated velocity obstacle: its arc, right leg or left leg, in this order on a tie. */
function leaveObstacle(p: Point, v: Point, reach: number, horizon: number): WayOut {
	const apart = Math.hypot(p.x, p.y);
	const toward = { x: p.x / apart, y: p.y / apart };
	const sin = Math.min(1, reach / apart);
	const leg = Math.sqrt(Math.max(0, apart * apart - reach * reach));
	const cos = leg / apart;
	const candidates: { x: number; y: number; normal: Point; distance: number }[] = [];
	const add = (x: number, y: number, normal: Point) => {
		candidates.push({ x, y, normal, distance: Math.hypot(v.x - x, v.y - y) });
	};

	const centre = { x: p.x / horizon, y: p.y / horizon };
	const fromCentre = Math.hypot(v.x - centre.x, v.y - centre.y);
	if (fromCentre > 0) {
		const n = { x: (v.x - centre.x) / fromCentre, y: (v.y - centre.y) / fromCentre };
		const radius = reach / horizon;
		const facing = -(n.x * toward.x + n.y * toward.y) >= sin - 1e-15;
		if (facing) add(centre.x + radius * n.x, centre.y + radius * n.y, n);
	}
	for (const side of [-1, 1]) {
		const along = { x: cos * toward.x - side * sin * toward.y, y: cos * toward.y + side * sin * toward.x };
		const reached = Math.max(v.x * along.x + v.y * along.y, leg / horizon);
		add(reached * along.x, reached * along.y, { x: -side * along.y, y: side * along.x });
	}

	const least = Math.min(...candidates.map(({ distance }) => distance));
	const [nearest, ...others] = candidates.filter(({ distance }) => distance <= least + 1e-12);
	const { x, y, normal } = nearest!;
	const tied = others.some((other) => Math.hypot(other.x - x, other.y - y) > 1e-9);
	return { x, y, normal, inside: meetsWithin(p, v, reach, horizon), tied };
}

function meetsWithin(p: Point, v: Point, reach: number, horizon: number): boolean {
	const square = v.x * v.x + v.y * v.y;
	const closest = square > 0 ? (v.x * p.x + v.y * p.y) / square : horizon;
	const time = Math.min(horizon, Math.max(0, closest));
	return Math.hypot(v.x * time - p.x, v.y * time - p.y) < reach - 1e-12;
}
