/** Draws what moves, on a canvas over the plan, and tells what is under the pointer. */

import type { LiveHalt } from '../../contracts/live.ts';
import type { Related, Selection } from '../../state/selection.ts';
import {
	describeOnPlan,
	drawGoal,
	drawPin,
	drawRobot,
	drawTrails,
	isCompact,
	pinRadius,
	reachPx
} from './draw-robots.ts';
import { drawZoneNames, drawZones, write } from './draw-zones.ts';
import type { Ink } from './ink.ts';
import { placeLabels, type Box, type LabelWish, type Side } from './place-labels.ts';
import type { RobotShape } from './plan.ts';
import { floorAt, screenX, screenY, type View } from './projection.ts';
import type { Scene } from './scene.ts';

interface Spot {
	readonly selection: Selection;
	readonly x: number;
	readonly y: number;
	readonly radius: number;
}

/** px around a mark that still hit it: targets of at least 24 px (WCAG 2.2, 2.5.8). */
const LEAST_HIT_PX = 13;
/** m; stands in for a robot whose model is not known to the page. */
const UNKNOWN_SHAPE = { length: 0.8, width: 0.6 };

export class Overlay {
	#spots: Spot[] = [];
	#sides = new Map<string, Side>();

	constructor(
		private readonly canvas: HTMLCanvasElement,
		private readonly scene: Scene
	) {}

	/** @param nowMs local time */
	draw(view: View, ink: Ink, related: Related, nowMs: number): void {
		const ctx = this.#begin(view);
		if (!ctx) return;
		const { scene } = this;
		this.#spots = [];
		drawZones(ctx, view, scene, ink, related.zone);
		const trails = scene.robots.flatMap(({ key }) => {
			const head = scene.robotMotion.at(key, nowMs);
			return head ? [{ points: scene.trails.of(key), head }] : [];
		});
		drawTrails(ctx, view, trails, nowMs, ink);
		this.#drawPeople(ctx, view, ink, nowMs);
		const written = drawZoneNames(ctx, view, scene, ink, related.zone);
		this.#drawRobots(ctx, view, ink, related, nowMs, written);
	}

	/** What is at a pixel: the nearest pin or robot, else the zone, else nothing. */
	hit(view: View, px: number, py: number): Selection | null {
		let best: Spot | null = null;
		let least = Infinity;
		for (const spot of this.#spots) {
			const d = Math.hypot(px - spot.x, py - spot.y);
			if (d <= Math.max(LEAST_HIT_PX, spot.radius) && d < least) [best, least] = [spot, d];
		}
		if (best) return best.selection;
		const zone = this.scene.zoneAt(floorAt(view, px, py));
		return zone === null ? null : { kind: 'zone', id: zone };
	}

	#begin({ width, height }: View): CanvasRenderingContext2D | null {
		const ratio = Math.min(devicePixelRatio || 1, 2);
		const [w, h] = [Math.round(width * ratio), Math.round(height * ratio)];
		if (this.canvas.width !== w || this.canvas.height !== h) [this.canvas.width, this.canvas.height] = [w, h];
		const ctx = this.canvas.getContext('2d');
		ctx?.setTransform(ratio, 0, 0, ratio, 0, 0);
		ctx?.clearRect(0, 0, width, height);
		return ctx;
	}

	/** Points without identity and without colour coding, all in one path. */
	#drawPeople(ctx: CanvasRenderingContext2D, view: View, ink: Ink, nowMs: number): void {
		const radius = Math.min(6, Math.max(1.8, 0.2 * view.pxPerM));
		ctx.beginPath();
		for (const id of this.scene.personIds) {
			const at = this.scene.personMotion.at(id, nowMs);
			if (!at) continue;
			const [x, y] = [screenX(view, at.x), screenY(view, at.y)];
			ctx.moveTo(x + radius, y);
			ctx.arc(x, y, radius, 0, 6.3);
		}
		ctx.strokeStyle = ink.floor;
		ctx.lineWidth = 2;
		ctx.stroke();
		ctx.fillStyle = ink.ink;
		ctx.globalAlpha = 0.75;
		ctx.fill();
		ctx.globalAlpha = 1;
	}

	#drawRobots(
		ctx: CanvasRenderingContext2D,
		view: View,
		ink: Ink,
		related: Related,
		nowMs: number,
		written: readonly Box[]
	): void {
		const { scene } = this;
		const serverNow = scene.frameMs + nowMs - scene.receivedMs;
		const halts = new Map(scene.halts.map((halt) => [halt.robot, halt]));
		const wishes: LabelWish[] = [];
		const texts = new Map<string, { text: string; bad: boolean }>();
		const pins: { halt: LiveHalt; x: number; y: number; lift: number }[] = [];
		ctx.font = `600 12px ${ink.sans}`;
		for (const robot of scene.robots) {
			const at = scene.robotMotion.at(robot.key, nowMs);
			if (!at) continue;
			const shape: RobotShape = scene.shapes.get(robot.key) ?? { ...UNKNOWN_SHAPE, ...robot };
			const selected = related.robots.has(robot.key);
			const halt = halts.get(robot.key);
			const [x, y] = [screenX(view, at.x), screenY(view, at.y)];
			if (selected && robot.goal) drawGoal(ctx, view, at, robot.goal, ink);
			drawRobot(ctx, view, robot, shape, at, ink, selected);
			const reach = reachPx(view, shape);
			this.#spots.push({ selection: { kind: 'robot', id: robot.key }, x, y, radius: reach });
			if (halt)
				pins.push({
					halt,
					x: screenX(view, halt.x_m),
					y: screenY(view, halt.y_m),
					lift: reach + (isCompact(view) ? 5 : 9)
				});
			const words = isCompact(view) && !selected ? '' : describeOnPlan(robot, halt, serverNow, scene.frameMs);
			const text = words ? `${robot.mark}\u2002${words}` : robot.mark;
			const bad = halt !== undefined || robot.condition === 'fault' || robot.condition === 'silent';
			texts.set(robot.key, { text, bad });
			const gap = reach + (bad || selected ? (isCompact(view) ? 6 : 9) : 4);
			wishes.push({ key: robot.key, x, y, gap, width: ctx.measureText(text).width, height: 14, must: bad || selected });
		}
		const taken = [...written];
		for (const { halt, x, y, lift } of pins) {
			const selected = related.incidents.has(halt.incident);
			const radius = pinRadius(view) + (selected ? 2 : 0);
			drawPin(ctx, x, y, lift, radius, halt, ink);
			const top = y - lift - radius;
			this.#spots.push({ selection: { kind: 'incident', id: halt.incident }, x, y: top, radius: 12 });
			taken.push({ x: x - radius, y: top - radius, w: 2 * radius, h: 2 * radius + lift });
		}
		wishes.sort((a, b) => Number(b.must) - Number(a.must));
		this.#writeLabels(ctx, view, ink, wishes, texts, taken);
	}

	#writeLabels(
		ctx: CanvasRenderingContext2D,
		view: View,
		ink: Ink,
		wishes: readonly LabelWish[],
		texts: ReadonlyMap<string, { text: string; bad: boolean }>,
		written: readonly Box[]
	): void {
		const placed = placeLabels(wishes, this.#sides, written, view);
		this.#sides = new Map(placed.map(({ key, side }) => [key, side]));
		ctx.font = `600 12px ${ink.sans}`;
		ctx.textBaseline = 'middle';
		for (const { key, x, y } of placed) {
			const label = texts.get(key);
			if (label) write(ctx, label.text, x, y, label.bad ? ink.alert : ink.ink, ink);
		}
	}
}
