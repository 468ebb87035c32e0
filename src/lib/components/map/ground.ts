/** The drawing under everything that moves: paper, floor, hatching, density, walls. Drawn again only when it changes. */

import type { LiveField } from '../../contracts/live.ts';
import type { Ring } from '../../domain/geometry/types.ts';
import { sizeCanvas } from './canvas.ts';
import { paintField, unpackField } from './field.ts';
import type { Ink } from './ink.ts';
import type { Plan } from './plan.ts';
import { screenX, screenY, type View } from './projection.ts';
import { computeRamp, RAMP_MAX_PER_M2 } from './ramp.ts';

type Ctx = CanvasRenderingContext2D;

/** px between two lines of the hatching */
const HATCH_PX = 8;
/** Drawn widths of walls, m, and the least in px */
const OUTER_WALL = { metres: 0.35, px: 2 };
const WALL = { metres: 0.2, px: 1.5 };

export class Ground {
	/** One pixel per cell of the density field; unseen cells are transparent */
	readonly #heat = document.createElement('canvas');
	#field: LiveField | null = null;
	#hatch: { pattern: CanvasPattern | null; ink: Ink } | null = null;

	constructor(
		private readonly canvas: HTMLCanvasElement,
		private readonly plan: Plan
	) {}

	/** Without a field the whole floor counts as unobserved. */
	takeField(field: LiveField | null, ink: Ink): void {
		this.#field = field;
		if (!field) return;
		const { cols, rows } = field;
		[this.#heat.width, this.#heat.height] = [cols, rows];
		const image = new ImageData(cols, rows);
		paintField(unpackField(field), field, computeRamp(ink.theme), RAMP_MAX_PER_M2, image.data);
		this.#heat.getContext('2d')?.putImageData(image, 0, 0);
	}

	draw(view: View, ink: Ink): void {
		const ctx = sizeCanvas(this.canvas, view);
		if (!ctx) return;
		const { walkable, walls, zones } = this.plan;
		ctx.fillStyle = ink.paper;
		ctx.fillRect(0, 0, view.width, view.height);

		const floor = pathOf(view, [walkable.outer, ...walkable.holes]);
		ctx.save();
		ctx.clip(floor, 'evenodd');
		ctx.fillStyle = ink.floor;
		ctx.fillRect(0, 0, view.width, view.height);
		this.#fillHatch(ctx, view, ink);
		this.#drawHeat(ctx, view);
		ctx.restore();

		ctx.setLineDash([6, 4]);
		ctx.lineWidth = 0.8;
		ctx.strokeStyle = ink.rule;
		for (const { polygon } of zones) ctx.stroke(pathOf(view, [polygon.outer, ...polygon.holes]));
		ctx.setLineDash([]);

		const fixtures = pathOf(view, walkable.holes);
		ctx.fillStyle = ink.hairline;
		ctx.fill(fixtures);
		ctx.strokeStyle = ink.ink;
		ctx.lineWidth = 1.25;
		ctx.stroke(fixtures);

		const lines = new Path2D();
		for (const { ax, ay, bx, by } of walls) {
			lines.moveTo(screenX(view, ax), screenY(view, ay));
			lines.lineTo(screenX(view, bx), screenY(view, by));
		}
		ctx.lineCap = 'square';
		ctx.lineWidth = Math.max(WALL.px, WALL.metres * view.pxPerM);
		ctx.stroke(lines);
		ctx.lineWidth = Math.max(OUTER_WALL.px, OUTER_WALL.metres * view.pxPerM);
		ctx.stroke(pathOf(view, [walkable.outer]));
	}

	/** Hatching moves with the floor, so that it does not swim while the plan is dragged. */
	#fillHatch(ctx: Ctx, view: View, ink: Ink): void {
		if (this.#hatch?.ink !== ink) this.#hatch = { pattern: makeHatch(ctx, ink), ink };
		const { pattern } = this.#hatch;
		if (!pattern) return;
		const shift = (px: number) => px % HATCH_PX;
		pattern.setTransform(
			new DOMMatrix().translate(shift(screenX(view, 0)), shift(screenY(view, 0))).scale(1 / HATCH_SCALE)
		);
		ctx.fillStyle = pattern;
		ctx.fillRect(0, 0, view.width, view.height);
	}

	#drawHeat(ctx: Ctx, view: View): void {
		const field = this.#field;
		if (!field) return;
		const { x0_m, y0_m, cols, rows, cell_m } = field;
		ctx.imageSmoothingEnabled = true;
		ctx.drawImage(
			this.#heat,
			screenX(view, x0_m),
			screenY(view, y0_m + rows * cell_m),
			cols * cell_m * view.pxPerM,
			rows * cell_m * view.pxPerM
		);
	}
}

/** The tile of the hatching is drawn larger than shown, for screens with more pixels. */
const HATCH_SCALE = 2;

/** Diagonal lines as a tile that repeats without a seam. */
function makeHatch(ctx: Ctx, ink: Ink): CanvasPattern | null {
	const size = HATCH_PX * HATCH_SCALE;
	const tile = document.createElement('canvas');
	tile.width = tile.height = size;
	const pen = tile.getContext('2d');
	if (!pen) return null;
	pen.strokeStyle = ink.rule;
	pen.globalAlpha = ink.theme === 'day' ? 0.4 : 0.5;
	pen.lineWidth = 0.8 * HATCH_SCALE;
	pen.beginPath();
	for (const shift of [-size, 0, size]) {
		pen.moveTo(shift - 1, size + 1);
		pen.lineTo(shift + size + 1, -1);
	}
	pen.stroke();
	return ctx.createPattern(tile, 'repeat');
}

function pathOf(view: View, rings: readonly Ring[]): Path2D {
	const path = new Path2D();
	for (const ring of rings) {
		ring.forEach(([x, y], i) => {
			if (i === 0) path.moveTo(screenX(view, x), screenY(view, y));
			else path.lineTo(screenX(view, x), screenY(view, y));
		});
		path.closePath();
	}
	return path;
}
