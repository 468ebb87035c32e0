/** The plan on the screen: the ground, the overlay on it, and the loop that draws while anything moves. */

import type { LiveField, LiveFrame } from '../../contracts/live.ts';
import type { Related, Selection } from '../../state/selection.ts';
import { openCamera } from './camera.ts';
import { Ground } from './ground.ts';
import { readInk, watchInk } from './ink.ts';
import { Overlay } from './overlay.ts';
import type { Plan, RobotShape } from './plan.ts';
import { boundsOf, fitView, isInSight, type Margins, type View } from './projection.ts';
import { Scene } from './scene.ts';

interface Options {
	/** Takes the pointer; both canvases lie in it */
	surface: HTMLElement;
	ground: HTMLCanvasElement;
	overlay: HTMLCanvasElement;
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
	zoom(factor: number): void;
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
/** px per metre a whole floor is shown at, at most */
const MOST_FIT = 60;
const NOTHING: Related = { robots: new Set(), incidents: new Set(), alarms: new Set(), zone: null };

export function openPlanView(options: Options): PlanView {
	const { surface, plan, onselect, onview } = options;
	const motion = matchMedia('(prefers-reduced-motion: reduce)');
	const still = () => motion.matches;
	const scene = new Scene(plan, options.robots, still);
	const ground = new Ground(options.ground, plan);
	const overlay = new Overlay(options.overlay, scene);
	let ink = readInk();
	let margins = options.margins;
	let related = NOTHING;
	let field: LiveField | null = null;
	/** Somebody moved the view: it is not fitted again by itself. */
	let moved = false;
	let groundDirty = true;
	let overlayDirty = true;

	const size = () => ({ width: surface.clientWidth, height: surface.clientHeight });
	const fitted = () => fitView(boundsOf(plan.walkable.outer), size(), margins, MOST_FIT);
	const touch = () => (groundDirty = overlayDirty = true);
	const camera = openCamera(surface, fitted(), still, (view, byHand) => {
		moved ||= byHand;
		touch();
		onview(view);
	});
	onview(camera.view);

	let request = 0;
	let lastDraw = 0;
	const loop = (now: number) => {
		request = requestAnimationFrame(loop);
		const pause = scene.robotMotion.moves(Date.now()) && !still() ? DRAW_EVERY_MS : IDLE_EVERY_MS;
		if (!overlayDirty && !groundDirty && now - lastDraw < pause - 4) return;
		if (groundDirty) ground.draw(camera.view, ink);
		overlay.draw(camera.view, ink, related, Date.now());
		groundDirty = overlayDirty = false;
		lastDraw = now;
	};
	request = requestAnimationFrame(loop);

	const resized = new ResizeObserver(() => {
		const { width, height } = size();
		if (width === 0 || height === 0) return;
		if (moved) camera.resize(width, height);
		else camera.goTo(fitted(), false);
	});
	resized.observe(surface);
	const unwatch = watchInk((next) => {
		ink = next;
		ground.takeField(field, ink);
		touch();
	});
	const at = ({ clientX, clientY }: MouseEvent) => {
		const box = surface.getBoundingClientRect();
		return overlay.hit(camera.view, clientX - box.left, clientY - box.top);
	};
	const onclick = (event: MouseEvent) => onselect(at(event));
	const onpointermove = (event: PointerEvent) => {
		const kind = event.buttons === 0 ? at(event)?.kind : undefined;
		surface.style.cursor = kind === 'robot' || kind === 'incident' ? 'pointer' : '';
	};
	surface.addEventListener('click', onclick);
	surface.addEventListener('pointermove', onpointermove);

	return {
		takeFrame: (frame, receivedMs) => {
			scene.takeFrame(frame, receivedMs);
			if (still()) overlayDirty = true;
		},
		takeField: (next) => {
			field = next;
			scene.takeField(next);
			ground.takeField(next, ink);
			groundDirty = true;
		},
		light: (next) => {
			related = next;
			overlayDirty = true;
		},
		setMargins: (next) => {
			margins = next;
			if (!moved) camera.goTo(fitted(), false);
		},
		pan: (dx, dy) => {
			moved = true;
			camera.pan(dx, dy);
		},
		zoom: (factor) => {
			moved = true;
			camera.zoom(factor);
		},
		fit: () => {
			moved = false;
			camera.goTo(fitted(), true);
		},
		show: (x, y, covered) => {
			const { view } = camera;
			if (isInSight(view, { ...margins, right: Math.max(margins.right, covered) }, x, y)) return;
			camera.goTo({ ...view, centre: { x: x + covered / 2 / view.pxPerM, y } }, true);
		},
		close: () => {
			cancelAnimationFrame(request);
			resized.disconnect();
			unwatch();
			camera.close();
			surface.removeEventListener('click', onclick);
			surface.removeEventListener('pointermove', onpointermove);
		}
	};
}
