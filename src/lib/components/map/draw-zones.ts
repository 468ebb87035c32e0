/** Zones on the overlay: emphasis where a zone is above its own threshold, its isoline, its name and density. */

import { density } from '../ui/format.ts';
import type { Ink } from './ink.ts';
import { isCompact } from './draw-robots.ts';
import type { Box } from './place-labels.ts';
import type { PlanZone } from './plan.ts';
import { boundsOf, screenX, screenY, type View } from './projection.ts';
import type { Scene, SceneZone } from './scene.ts';
import type { Ring } from '../../domain/geometry/types.ts';

type Ctx = CanvasRenderingContext2D;

export function drawZones(ctx: Ctx, view: View, scene: Scene, ink: Ink, selected: string | null): void {
	for (const entry of scene.zones) {
		const chosen = entry.zone.key === selected;
		const above = entry.live?.above_threshold ?? false;
		if (chosen || above) {
			ctx.beginPath();
			for (const ring of [entry.zone.polygon.outer, ...entry.zone.polygon.holes]) traceRing(ctx, view, ring);
			ctx.lineWidth = chosen ? 3 : 2;
			ctx.strokeStyle = chosen ? ink.tide : ink.alert;
			ctx.setLineDash(chosen ? [] : [10, 4]);
			ctx.stroke();
			ctx.setLineDash([]);
		}
		drawIsoline(ctx, view, entry.isoline, ink);
	}
}

/**
 * Names over people and isolines. Returns where it wrote, so that robots' labels keep off.
 */
export function drawZoneNames(ctx: Ctx, view: View, scene: Scene, ink: Ink, selected: string | null): Box[] {
	const written: Box[] = [];
	ctx.textAlign = 'center';
	ctx.textBaseline = 'middle';
	ctx.lineJoin = 'round';
	for (const entry of scene.zones) {
		const x = screenX(view, entry.label.x);
		const y = screenY(view, entry.label.y);
		if (x < -80 || y < -40 || x > view.width + 80 || y > view.height + 40) continue;
		const room = widthOf(entry) * view.pxPerM - 8;
		const above = entry.live?.above_threshold ?? false;
		const name = entry.zone.name;
		const figures = figuresOf(entry);
		const compact = isCompact(view);
		ctx.font = `600 ${compact ? 11 : 13}px ${ink.sans}`;
		const fits = ctx.measureText(name).width <= room && (!compact || heightOf(entry) * view.pxPerM > 34);
		if (fits) {
			const width = ctx.measureText(name).width;
			written.push({ x: x - width / 2, y: y - 15, w: width, h: 30 });
			write(ctx, name, x, y - 8, entry.zone.key === selected ? ink.tide : ink.ink, ink);
		}
		ctx.font = `${above ? 600 : 400} 12px ${ink.sans}`;
		if ((fits && !compact) || (above && ctx.measureText(figures).width <= room + 16))
			write(ctx, figures, x, fits ? y + 8 : y, above ? ink.alert : ink.muted, ink);
	}
	ctx.font = `italic 12px ${ink.sans}`;
	for (const { x, y, text } of scene.plan.labels)
		if (view.pxPerM > 5) write(ctx, text, screenX(view, x), screenY(view, y), ink.muted, ink);
	ctx.textAlign = 'left';
	return written;
}

function figuresOf({ zone, live }: SceneZone): string {
	if (zone.private) return 'private';
	if (!live || live.density_per_m2 === null) return 'not measured';
	const level = live.level ? ` · ${live.level}` : '';
	return `${live.above_threshold ? '▲ ' : ''}${density(live.density_per_m2)}${level}`;
}

/** Text on a halo of paper, readable on hatching and on any density. */
export function write(ctx: Ctx, text: string, x: number, y: number, colour: string, ink: Ink): void {
	ctx.strokeStyle = ink.floor;
	ctx.lineWidth = 3.5;
	ctx.strokeText(text, x, y);
	ctx.fillStyle = colour;
	ctx.fillText(text, x, y);
}

function drawIsoline(ctx: Ctx, view: View, lines: readonly number[], ink: Ink): void {
	if (lines.length === 0) return;
	ctx.beginPath();
	for (let i = 0; i + 3 < lines.length; i += 4) {
		ctx.moveTo(screenX(view, lines[i] ?? 0), screenY(view, lines[i + 1] ?? 0));
		ctx.lineTo(screenX(view, lines[i + 2] ?? 0), screenY(view, lines[i + 3] ?? 0));
	}
	ctx.strokeStyle = ink.ink;
	ctx.lineWidth = 1.25;
	ctx.stroke();
}

function traceRing(ctx: Ctx, view: View, ring: Ring): void {
	ring.forEach(([x, y], i) => {
		if (i === 0) ctx.moveTo(screenX(view, x), screenY(view, y));
		else ctx.lineTo(screenX(view, x), screenY(view, y));
	});
	ctx.closePath();
}

const sizes = new WeakMap<object, { width: number; height: number }>();

const widthOf = ({ zone }: SceneZone): number => sizeOf(zone).width;
const heightOf = ({ zone }: SceneZone): number => sizeOf(zone).height;

/** Of the zone's box, m. */
function sizeOf(zone: PlanZone): { width: number; height: number } {
	let size = sizes.get(zone);
	if (size === undefined) {
		const { minX, minY, maxX, maxY } = boundsOf(zone.polygon.outer);
		sizes.set(zone, (size = { width: maxX - minX, height: maxY - minY }));
	}
	return size;
}
