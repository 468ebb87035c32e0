/** The plan on the screen: the map library under it, the overlay on it, and the loop that draws while anything moves. */

import type { ImageSource, Map as LibreMap } from 'maplibre-gl';
import type { LiveField, LiveFrame } from '../../contracts/live.ts';
import type { Related, Selection } from '../../state/selection.ts';
import { paintField, unpackField } from './field.ts';
import { readInk, watchInk, type Ink } from './ink.ts';
import { Overlay } from './overlay.ts';
import type { Plan, RobotShape } from './plan.ts';
import { boundsOf, fromLngLat, pxPerMetre, screenX, screenY, toLngLat, zoomAt, type View } from './projection.ts';
import { computeRamp, RAMP_MAX_PER_M2 } from './ramp.ts';
import { Scene } from './scene.ts';
import { buildStyle, drawHatch, HATCH, HEAT, imageCorners } from './style.ts';

type Library = typeof import('maplibre-gl');
type Margins = { top: number; right: number; bottom: number; left: number };

interface Options {
	mapBox: HTMLDivElement;
	canvas: HTMLCanvasElement;
	plan: Plan;
	robots: readonly RobotShape[];
	margins: Margins;
	onselect: (selection: Selection | null) => void;
	onview: (view: View) => void;
}

export interface PlanView {
	takeFrame(this: void, frame: LiveFrame, receivedMs: number): void;
	takeField(field: LiveField | null): void;
	light(related: Related): void;
	setMargins(margins: Margins): void;
	pan(dx: number, dy: number): void;
	zoom(by: number): void;
	fit(): void;
	/**
	 * Brings a point of the floor into sight; stays where it is when the point is in sight already.
	 *
	 * @param covered px at the right edge that something lies over
	 */
	show(x: number, y: number, covered: number): void;
	close(): void;
}

/** ms between two drawings while things move: 25 a second is smooth at walking pace and leaves a small computer air. */
const DRAW_EVERY_MS = 40;
/** ms between two drawings while nothing moves: ages on the plan still count. */
const IDLE_EVERY_MS = 500;
const HATCH_SCALE = 2;
const NOTHING: Related = { robots: new Set(), incidents: new Set(), alarms: new Set(), zone: null };

export function openPlanView(library: Library, options: Options): PlanView {
	const { mapBox, canvas, plan, onselect, onview } = options;
	const still = matchMedia('(prefers-reduced-motion: reduce)');
	const scene = new Scene(plan, options.robots, () => still.matches);
	const overlay = new Overlay(canvas, scene);
	let ink = readInk();
	let margins = options.margins;
	let related = NOTHING;
	let field: LiveField | null = null;
	let moved = false;
	let closed = false;

	const map = openMap(library, mapBox, plan, ink);
	const fit = (animate: boolean) => map.fitBounds(...fitOf(plan, margins, animate && !still.matches));
	const viewNow = (): View => readView(map, mapBox);
	const draw = () => overlay.draw(viewNow(), ink, related, Date.now());

	const paint = () => {
		const source = map.getSource<ImageSource>(HEAT);
		if (source) paintHeat(source, field, ink, plan);
	};
	map.on('style.load', () => {
		if (!map.hasImage(HATCH)) map.addImage(HATCH, drawHatch(ink, HATCH_SCALE), { pixelRatio: HATCH_SCALE });
		paint();
	});
	// Drawn in the same task as the plan below, so that the two never part while it is dragged.
	map.on('render', draw);
	map.on('move', () => onview(viewNow()));
	map.on('movestart', (event) => (moved ||= event.originalEvent !== undefined));
	map.on('resize', () => (moved ? onview(viewNow()) : fit(false)));
	map.on('click', ({ point }) => onselect(overlay.hit(viewNow(), point.x, point.y)));
	map.on('mousemove', ({ point }) => {
		const kind = overlay.hit(viewNow(), point.x, point.y)?.kind;
		map.getCanvas().style.cursor = kind === 'robot' || kind === 'incident' ? 'pointer' : '';
	});
	const unwatch = watchInk((next) => {
		ink = next;
		map.setStyle(buildStyle(plan, ink), { diff: true });
		if (map.hasImage(HATCH)) map.updateImage(HATCH, drawHatch(ink, HATCH_SCALE));
		paint();
		draw();
	});
	fit(false);
	onview(viewNow());

	let lastDraw = 0;
	const loop = (now: number) => {
		if (closed) return;
		requestAnimationFrame(loop);
		const pause = scene.robotMotion.moves(Date.now()) && !still.matches ? DRAW_EVERY_MS : IDLE_EVERY_MS;
		if (now - lastDraw < pause - 4) return;
		lastDraw = now;
		draw();
	};
	requestAnimationFrame(loop);

	return {
		takeFrame: (frame, receivedMs) => {
			scene.takeFrame(frame, receivedMs);
			if (still.matches) draw();
		},
		takeField: (next) => {
			field = next;
			scene.takeField(next);
			paint();
		},
		light: (next) => {
			related = next;
			draw();
		},
		setMargins: (next) => {
			margins = next;
			if (!moved) fit(false);
		},
		pan: (dx, dy) => {
			moved = true;
			map.panBy([dx, dy], { animate: !still.matches, duration: 150 });
		},
		zoom: (by) => {
			moved = true;
			map.zoomTo(map.getZoom() + by * 0.5, { animate: !still.matches, duration: 150 });
		},
		fit: () => {
			moved = false;
			fit(true);
		},
		show: (x, y, covered) => {
			if (inSight(viewNow(), { ...margins, right: Math.max(margins.right, covered) }, x, y)) return;
			map.easeTo({ center: toLngLat(x, y), offset: [-covered / 2, 0], animate: !still.matches, duration: 300 });
		},
		close: () => {
			closed = true;
			unwatch();
			map.remove();
		}
	};
}

function openMap(library: Library, container: HTMLDivElement, plan: Plan, ink: Ink): LibreMap {
	const map = new library.Map({
		container,
		style: buildStyle(plan, ink),
		attributionControl: false,
		keyboard: false,
		dragRotate: false,
		pitchWithRotate: false,
		touchPitch: false,
		renderWorldCopies: false,
		fadeDuration: 0,
		maxZoom: 24,
		minZoom: 14,
		pixelRatio: Math.min(devicePixelRatio || 1, 2)
	});
	map.touchZoomRotate.disableRotation();
	// The keyboard has its own, larger handle beside the plan.
	map.getCanvas().tabIndex = -1;
	return map;
}

function readView(map: LibreMap, box: HTMLElement): View {
	const { lng, lat } = map.getCenter();
	return {
		centre: fromLngLat(lng, lat),
		pxPerM: pxPerMetre(map.getZoom()),
		width: box.clientWidth,
		height: box.clientHeight
	};
}

function fitOf(plan: Plan, margins: Margins, animate: boolean) {
	const { minX, minY, maxX, maxY } = boundsOf(plan.walkable.outer);
	return [
		[toLngLat(minX, minY), toLngLat(maxX, maxY)],
		{ padding: margins, animate, duration: 250, maxZoom: zoomAt(60) }
	] as [[[number, number], [number, number]], object];
}

function inSight(view: View, margins: Margins, x: number, y: number): boolean {
	const [px, py] = [screenX(view, x), screenY(view, y)];
	return px > margins.left && px < view.width - margins.right && py > margins.top && py < view.height - margins.bottom;
}

/** Puts the density into the image layer; without a field the whole floor counts as unobserved. */
function paintHeat(source: ImageSource, field: LiveField | null, ink: Ink, plan: Plan): void {
	const box = boundsOf(plan.walkable.outer);
	const { cols, rows } = field ?? { cols: 1, rows: 1 };
	const pixels = new ImageData(cols, rows);
	if (field) paintField(unpackField(field), field, computeRamp(ink.theme), RAMP_MAX_PER_M2, pixels.data);
	const coordinates = field
		? imageCorners(field.x0_m, field.y0_m, field.x0_m + cols * field.cell_m, field.y0_m + rows * field.cell_m)
		: imageCorners(box.minX, box.minY, box.maxX, box.maxY);
	source.updateImage({ image: pixels, coordinates });
}
