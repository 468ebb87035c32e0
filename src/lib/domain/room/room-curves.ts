/** Boundaries of obstacles shrunk by flexibility, and of the robot's own limits, cut to where they can bound the best velocity. */

import {
	AX,
	AY,
	BX,
	BY,
	DISC,
	FLEX,
	FX,
	FY,
	KIND,
	N1X,
	N1Y,
	N2X,
	N2Y,
	R,
	STRIDE,
	TOUCHING,
	VX,
	VY,
	type Obstacles
} from './velocity-obstacle.ts';

export interface Curves {
	/** Rows of `LINE`: nx, ny, c, least t, greatest t, greatest x. A point is c·n + t·(−ny, nx). */
	readonly lines: Float64Array;
	/** Rows of `ARC`: centre x and y, radius, facing x and y, limit: on the arc (w − centre)·facing ≤ limit. */
	readonly arcs: Float64Array;
}

export const LINE = 6;
export const ARC = 6;

/** Slack of every cut, so that rounding never loses a crossing; what is kept too much is tested anyway. */
const SLACK = 1e-7;

/**
 * Curves that reach beyond x = `beyond` within the speed limit (m/s) and the sector (rad to either side of +x).
 *
 * @param scale factor on every flexibility
 */
export function collectCurves(
	{ rows, count, horizon }: Obstacles,
	{ maxSpeed, sector }: { readonly maxSpeed: number; readonly sector: number },
	scale: number,
	beyond: number
): Curves {
	const lines: number[] = [];
	const arcs: number[] = [];
	const sin = Math.sin(sector);
	const cos = Math.cos(sector);

	/** The part from `from` to `to` of the line n·w = c. */
	const line = (nx: number, ny: number, c: number, from: number, to: number) => {
		const square = maxSpeed * maxSpeed - c * c;
		if (square < 0) return;
		const half = Math.sqrt(square);
		let least = Math.max(from, -half);
		let most = Math.min(to, half);
		/** Cuts to where a + b·t ≥ 0. */
		const cut = (a: number, b: number) => {
			if (b > 1e-12) least = Math.max(least, -a / b);
			else if (b < -1e-12) most = Math.min(most, -a / b);
			else if (a < -SLACK) most = -Infinity;
		};
		cut(c * nx - beyond, -ny);
		cut(c * (nx * sin - ny * cos), -ny * sin - nx * cos);
		cut(c * (nx * sin + ny * cos), -ny * sin + nx * cos);
		if (least > most + 2 * SLACK) return;
		lines.push(nx, ny, c, least - SLACK, most + SLACK, c * nx + Math.max(-least * ny, -most * ny) + SLACK);
	};
	const arc = (x: number, y: number, radius: number, facingX: number, facingY: number, limit: number) => {
		if (radius > 0 && x + radius > beyond && Math.hypot(x, y) - radius <= maxSpeed) {
			arcs.push(x, y, radius, facingX, facingY, limit + SLACK);
		}
	};

	for (let at = 0; at < count * STRIDE; at += STRIDE) {
		const vx = rows[at + VX]!;
		const vy = rows[at + VY]!;
		const n1x = rows[at + N1X]!;
		const n1y = rows[at + N1Y]!;
		const flexibility = scale * rows[at + FLEX]!;
		if (rows[at + KIND] === TOUCHING) {
			line(n1x, n1y, n1x * vx + n1y * vy + flexibility, -Infinity, Infinity);
			continue;
		}
		const n2x = rows[at + N2X]!;
		const n2y = rows[at + N2Y]!;
		const ax = rows[at + AX]!;
		const ay = rows[at + AY]!;
		const bx = rows[at + BX]!;
		const by = rows[at + BY]!;
		const r = rows[at + R]!;
		// A leg leaves the robot along −t on the left and along +t on the right, and starts at the tangent point.
		const start1 = Math.min(n1y * ax - n1x * ay, n1y * bx - n1x * by) / horizon;
		const start2 = Math.min(n2x * ay - n2y * ax, n2x * by - n2y * bx) / horizon;
		line(n1x, n1y, n1x * vx + n1y * vy - flexibility, -Infinity, n1x * vy - n1y * vx - start1);
		line(n2x, n2y, n2x * vx + n2y * vy - flexibility, n2x * vy - n2y * vx + start2, Infinity);
		const radius = r / horizon - flexibility;
		arc(vx + ax / horizon, vy + ay / horizon, radius, ax, ay, -r * radius);
		if (rows[at + KIND] === DISC) continue;

		arc(bx / horizon, by / horizon, radius, bx, by, -r * radius);
		for (let side = -1; side <= 1; side += 2) {
			const fx = side * rows[at + FX]!;
			const fy = side * rows[at + FY]!;
			const offset = fx * ax + fy * ay;
			if (offset > -r + SLACK || (fx === 0 && fy === 0)) continue;
			const toA = (fx * ay - fy * ax) / horizon;
			const toB = (fx * by - fy * bx) / horizon;
			line(fx, fy, (offset + r) / horizon, Math.min(toA, toB), Math.max(toA, toB));
		}
	}
	line(-sin, cos, 0, -Infinity, Infinity);
	line(sin, cos, 0, -Infinity, Infinity);
	arc(0, 0, maxSpeed, 0, 0, 0);
	return { lines: Float64Array.from(lines), arcs: Float64Array.from(arcs) };
}
