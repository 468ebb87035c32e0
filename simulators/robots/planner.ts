/**
 * How a simulated robot picks its next velocity. `decoupled` takes people to walk on as if it were not there;
 * `counting` takes them to change their velocity a little for it.
 */

import type { NavGrid } from '../core/nav-grid.ts';
import type { Planner } from '../venue/model.ts';

/** Numbers per obstacle in a packed list: dx, dy (from the robot, m), vx, vy (m/s), radius (m), flexibility (m/s), 1 for a person. */
export const OBSTACLE_SIZE = 7;

export interface PlanQuery {
	readonly x: number;
	readonly y: number;
	/** rad */
	readonly heading: number;
	readonly radius: number;
	readonly maxSpeed: number;
	/** rad, where the route leads */
	readonly direction: number;
	readonly planner: Planner;
	readonly obstacles: Float64Array;
	readonly count: number;
	readonly grid: NavGrid;
}

export interface Plan {
	/** m/s */
	speed: number;
	/** rad, direction to move in */
	heading: number;
	/** What stands in the way; null when the robot can go. */
	blockedBy: 'people' | 'robots' | 'walls' | null;
}

/** m/s each person is taken to give a robot that counts on it. Chosen by us, near the desk's own default. */
export const COUNTED_ON = 0.4;
const HORIZON: Record<Planner, number> = { decoupled: 2.5, counting: 2 };
/** m kept beyond touching */
const MARGIN = 0.08;
const TURNS = [0, 0.17, -0.17, 0.35, -0.35, 0.6, -0.6, 0.87, -0.87, 1.2, -1.2];
const SPEEDS = [1, 0.75, 0.5, 0.3, 0.15];

/** The velocity with most progress along the route that keeps clear over the horizon; speed 0 when none does. */
export function planVelocity(query: PlanQuery, out: Plan): Plan {
	const { direction, maxSpeed, heading } = query;
	const horizon = HORIZON[query.planner];
	let best = -Infinity;
	let walled = 0;
	out.speed = 0;
	out.heading = direction;
	out.blockedBy = null;
	for (const turn of TURNS) {
		const angle = direction + turn;
		const cos = Math.cos(angle);
		const sin = Math.sin(angle);
		const swing = Math.abs(wrap(angle - heading));
		if (!isWayOpen(query, cos, sin)) {
			walled++;
			continue;
		}
		for (const share of SPEEDS) {
			const score = share * Math.cos(turn) - 0.08 * swing - 0.05 * Math.abs(turn);
			if (score <= best) break;
			const speed = share * maxSpeed;
			if (!isClear(query, cos * speed, sin * speed, horizon, false)) continue;
			best = score;
			out.speed = speed;
			out.heading = angle;
			break;
		}
	}
	if (best > -Infinity) return out;
	if (walled === TURNS.length) out.blockedBy = 'walls';
	else {
		const slow = 0.3 * maxSpeed;
		const others = !isClear(query, Math.cos(direction) * slow, Math.sin(direction) * slow, horizon, true);
		out.blockedBy = others ? 'robots' : 'people';
	}
	return out;
}

/** The robot's own size is already in the grid; it looks 0.9 m ahead, about two of its stopping distances. */
function isWayOpen({ x, y, grid }: PlanQuery, cos: number, sin: number): boolean {
	const here = grid.index(x, y);
	const ahead = 0.9;
	if (here >= 0 && grid.free[here]) return grid.isOpen(x, y, x + cos * ahead, y + sin * ahead);
	// Standing closer to a wall than the grid allows (a dock, a push): any way that leads to free floor will do.
	const target = grid.index(x + cos * ahead, y + sin * ahead);
	return target >= 0 && grid.free[target] === 1 && !grid.walls.isBlocked(x, y, x + cos * ahead, y + sin * ahead);
}

function isClear(query: PlanQuery, wx: number, wy: number, horizon: number, robotsOnly: boolean): boolean {
	const { obstacles, count, radius } = query;
	for (let k = 0; k < count; k++) {
		const o = k * OBSTACLE_SIZE;
		if (robotsOnly && obstacles[o + 6] === 1) continue;
		const px = obstacles[o]!;
		const py = obstacles[o + 1]!;
		const cx = wx - obstacles[o + 2]!;
		const cy = wy - obstacles[o + 3]!;
		if (intrusion(px, py, cx, cy, radius + obstacles[o + 4]! + MARGIN, horizon) > obstacles[o + 5]!) return false;
	}
	return true;
}

/**
 * How far, in m/s, relative velocity c must change for two discs p apart and R together to stay apart for `horizon` seconds.
 * Depth in the truncated velocity obstacle (Fiorini & Shiller 1998; van den Berg et al. 2011; from memory).
 */
function intrusion(px: number, py: number, cx: number, cy: number, together: number, horizon: number): number {
	const d2 = px * px + py * py;
	const approach = cx * px + cy * py;
	if (d2 <= together * together) return d2 > 0 ? Math.max(0, approach / Math.sqrt(d2)) : 0;
	if (approach <= 0) return 0;
	const qx = cx - px / horizon;
	const qy = cy - py / horizon;
	const q2 = qx * qx + qy * qy;
	const along = qx * px + qy * py;
	const arc = together / horizon;
	if (along < 0 && along * along > together * together * q2) return Math.max(0, arc - Math.sqrt(q2));
	// Distance to the nearer tangent line of the cone.
	const d = Math.sqrt(d2);
	const leg = Math.sqrt(d2 - together * together);
	const ux = px / d;
	const uy = py / d;
	const side = Math.abs(ux * cy - uy * cx);
	return Math.max(0, ((cx * ux + cy * uy) * together - side * leg) / d);
}

export function wrap(angle: number): number {
	let a = angle % (2 * Math.PI);
	if (a > Math.PI) a -= 2 * Math.PI;
	else if (a <= -Math.PI) a += 2 * Math.PI;
	return a;
}
