/** One robot on the plan: footprint to scale, pointed at its front, and a shape for each condition. */

import type { Condition, LiveHalt, LiveRobot } from '../../contracts/live.ts';
import { age } from '../ui/format.ts';
import { HALT_LETTERS } from './halt-letter.ts';
import type { Ink } from './ink.ts';
import type { Placed } from './motion.ts';
import type { RobotShape } from './plan.ts';
import { screenX, screenY, type View } from './projection.ts';
import { TRAIL_MS, type TrailPoint } from './trail.ts';

type Ctx = CanvasRenderingContext2D;

/** px; a footprint is never drawn shorter, or nobody would find it on a plan of a large hall. */
const LEAST_PX = 13;
const LEAST_COMPACT_PX = 10;
/** px per metre below which a whole floor is squeezed into a phone: marks are smaller and labels without words. */
const COMPACT_BELOW = 5;
/** px */
const PIN_RADIUS = 9;
const COMPACT_PIN_RADIUS = 7;

export const isCompact = ({ pxPerM }: View): boolean => pxPerM < COMPACT_BELOW;
export const pinRadius = (view: View): number => (isCompact(view) ? COMPACT_PIN_RADIUS : PIN_RADIUS);

/** How many times larger than true scale robots of this length are drawn, 1 when to scale. */
export const enlargement = (view: View, length: number): number =>
	Math.max(1, (isCompact(view) ? LEAST_COMPACT_PX : LEAST_PX) / (length * view.pxPerM));

/** px from the middle of a robot to the outside of its mark. */
export const reachPx = (view: View, { length, width }: RobotShape): number =>
	(Math.hypot(length, width) / 2) * view.pxPerM * enlargement(view, length);

/** The words beside a robot's mark: none while it works. */
export function describeOnPlan(robot: LiveRobot, halt: LiveHalt | undefined, nowMs: number, frameMs: number): string {
	if (robot.condition === 'silent' && robot.pose_age_ms !== null)
		return `silent ${age(robot.pose_age_ms + nowMs - frameMs)}`;
	if (halt) return `${halt.kind} ${age(nowMs - halt.onset_ms)}`;
	if (robot.condition === 'charging') return `charging ${Math.round((robot.battery ?? 0) * 100)}%`;
	if (robot.battery !== null && robot.battery < 0.15) return `battery ${Math.round(robot.battery * 100)}%`;
	return robot.condition === 'working' || robot.condition === 'idle' ? '' : robot.condition;
}

/** @param at where to draw it, m; `silent` robots are drawn hollow at their last place */
export function drawRobot(
	ctx: Ctx,
	view: View,
	robot: LiveRobot,
	shape: RobotShape,
	at: Placed,
	ink: Ink,
	selected: boolean
): void {
	const grow = enlargement(view, shape.length);
	const length = shape.length * view.pxPerM * grow;
	const width = Math.max(6, shape.width * view.pxPerM * grow);
	ctx.save();
	ctx.translate(screenX(view, at.x), screenY(view, at.y));
	if (selected) drawRing(ctx, reachPx(view, shape) + 9, 2.5, ink.tide, ink);
	if (robot.condition === 'halted' || robot.condition === 'fault')
		drawRing(ctx, reachPx(view, shape) + (isCompact(view) ? 2.5 : 4), isCompact(view) ? 2.5 : 3.5, ink.alert, ink);

	ctx.rotate(-(Number.isNaN(at.heading) ? 0 : at.heading));
	traceFootprint(ctx, length, width, !Number.isNaN(at.heading));
	const look = LOOKS[robot.condition](ink);
	ctx.lineJoin = 'round';
	ctx.strokeStyle = ink.floor;
	ctx.lineWidth = 4;
	ctx.stroke();
	ctx.fillStyle = look.fill;
	ctx.fill();
	ctx.strokeStyle = look.line;
	ctx.lineWidth = 1.75;
	if (robot.condition === 'silent') ctx.setLineDash([3, 2.5]);
	ctx.stroke();
	ctx.setLineDash([]);
	drawSign(ctx, robot.condition, Math.min(length, width), look.line);
	ctx.restore();
}

/** The pin of an open incident: a stem from where it began to a disc with the halt's letter. */
export function drawPin(ctx: Ctx, x: number, y: number, lift: number, radius: number, halt: LiveHalt, ink: Ink): void {
	const top = y - lift - radius;
	ctx.beginPath();
	ctx.moveTo(x, y);
	ctx.lineTo(x, top);
	ctx.lineWidth = 2;
	ctx.strokeStyle = ink.alert;
	ctx.stroke();
	ctx.beginPath();
	ctx.arc(x, top, radius + 1.5, 0, 7);
	ctx.fillStyle = ink.floor;
	ctx.fill();
	ctx.beginPath();
	ctx.arc(x, top, radius, 0, 7);
	ctx.fillStyle = ink.alert;
	ctx.fill();
	ctx.font = `700 ${radius + 3}px ${ink.sans}`;
	ctx.textAlign = 'center';
	ctx.textBaseline = 'middle';
	ctx.fillStyle = ink.onFill;
	ctx.fillText(HALT_LETTERS[halt.kind], x, top + 0.5);
	ctx.textAlign = 'left';
}

/** Bands of age a trail fades in; each is one stroke for all robots, which keeps a large fleet cheap. */
const TRAIL_BANDS = 6;

export interface TrailToDraw {
	readonly points: readonly TrailPoint[];
	/** Where the robot is drawn now */
	readonly head: Placed;
}

/** Trails that fade in 20 s. */
export function drawTrails(ctx: Ctx, view: View, trails: readonly TrailToDraw[], nowMs: number, ink: Ink): void {
	const bands = Array.from({ length: TRAIL_BANDS }, () => new Path2D());
	for (const { points, head } of trails) {
		points.forEach((from, i) => {
			const to = points[i + 1] ?? head;
			const band = bands[Math.floor(((nowMs - from.ms) / TRAIL_MS) * TRAIL_BANDS)];
			band?.moveTo(screenX(view, from.x), screenY(view, from.y));
			band?.lineTo(screenX(view, to.x), screenY(view, to.y));
		});
	}
	ctx.strokeStyle = ink.ink;
	ctx.lineWidth = 1.5;
	bands.forEach((band, i) => {
		ctx.globalAlpha = 0.5 * (1 - i / TRAIL_BANDS);
		ctx.stroke(band);
	});
	ctx.globalAlpha = 1;
}

/** Where the selected robot is going: a dashed line to a small cross. */
export function drawGoal(ctx: Ctx, view: View, at: Placed, goal: { x_m: number; y_m: number }, ink: Ink): void {
	const [x, y] = [screenX(view, goal.x_m), screenY(view, goal.y_m)];
	ctx.strokeStyle = ink.tide;
	ctx.lineWidth = 1.5;
	ctx.setLineDash([5, 4]);
	ctx.beginPath();
	ctx.moveTo(screenX(view, at.x), screenY(view, at.y));
	ctx.lineTo(x, y);
	ctx.stroke();
	ctx.setLineDash([]);
	ctx.lineWidth = 2.5;
	ctx.beginPath();
	ctx.moveTo(x - 6, y - 6);
	ctx.lineTo(x + 6, y + 6);
	ctx.moveTo(x - 6, y + 6);
	ctx.lineTo(x + 6, y - 6);
	ctx.stroke();
}

interface Look {
	readonly fill: string;
	readonly line: string;
}

const solid = (ink: Ink): Look => ({ fill: ink.ink, line: ink.ink });
const open = (ink: Ink): Look => ({ fill: ink.sheet, line: ink.ink });

/** Solid is at work; open is not. Colour comes only with what is abnormal. */
const LOOKS: Record<Condition, (ink: Ink) => Look> = {
	working: solid,
	manual: solid,
	idle: open,
	waiting: open,
	charging: open,
	paused: (ink) => ({ fill: ink.sheet, line: ink.caution }),
	halted: (ink) => ({ fill: ink.alert, line: ink.alert }),
	fault: (ink) => ({ fill: ink.alert, line: ink.alert }),
	silent: (ink) => ({ fill: 'transparent', line: ink.alert })
};

/** Pointed at its front and notched at its rear, inside the true footprint; without a heading a plain box. */
function traceFootprint(ctx: Ctx, length: number, width: number, headed: boolean): void {
	const [l, w] = [length / 2, width / 2];
	ctx.beginPath();
	if (!headed) {
		ctx.roundRect(-l, -w, length, width, Math.min(3, w));
		return;
	}
	const shoulder = l - Math.min(w, l * 0.8);
	ctx.moveTo(-l, -w);
	ctx.lineTo(shoulder, -w);
	ctx.lineTo(l, 0);
	ctx.lineTo(shoulder, w);
	ctx.lineTo(-l, w);
	ctx.lineTo(-l + w * 0.35, 0);
	ctx.closePath();
}

/** Two bars for paused, one dot for waiting, a plus for charging. */
function drawSign(ctx: Ctx, condition: Condition, size: number, colour: string): void {
	const s = Math.max(2, size * 0.22);
	ctx.fillStyle = colour;
	if (condition === 'paused') {
		ctx.fillRect(-s * 1.4, -s * 1.3, s * 0.8, s * 2.6);
		ctx.fillRect(0, -s * 1.3, s * 0.8, s * 2.6);
	} else if (condition === 'waiting') {
		ctx.beginPath();
		ctx.arc(-s * 0.5, 0, s * 0.8, 0, 7);
		ctx.fill();
	} else if (condition === 'charging') {
		ctx.fillRect(-s * 1.6, -s * 0.35, s * 2.2, s * 0.7);
		ctx.fillRect(-s * 0.85, -s * 1.1, s * 0.7, s * 2.2);
	}
}

function drawRing(ctx: Ctx, radius: number, width: number, colour: string, ink: Ink): void {
	for (const [w, c] of [
		[width + 2.5, ink.floor],
		[width, colour]
	] as const) {
		ctx.beginPath();
		ctx.arc(0, 0, radius, 0, 7);
		ctx.lineWidth = w;
		ctx.strokeStyle = c;
		ctx.stroke();
	}
}
