/** Moves the view: dragging, wheel and pinch by d3-zoom, and the same by keys. */

import { select } from 'd3-selection';
import { zoom, zoomIdentity, type ZoomTransform } from 'd3-zoom';
import type { View } from './projection.ts';

export interface Camera {
	readonly view: View;
	/** @param animate glides there unless motion is unwanted */
	goTo(view: View, animate: boolean): void;
	/** By px of the screen: positive moves the view right and down. */
	pan(dx: number, dy: number): void;
	/** By a factor, about the middle of the screen. */
	zoom(factor: number): void;
	/** The viewport has another size; the middle stays. */
	resize(width: number, height: number): void;
	close(): void;
}

/** px per metre: from a campus on a phone to the bolts of a robot. */
const SCALES: [number, number] = [0.2, 400];
const GLIDE_MS = 250;

/**
 * @param surface element that takes the pointer
 * @param onmove told the new view; `byHand` when a person moved it
 */
export function openCamera(
	surface: HTMLElement,
	start: View,
	still: () => boolean,
	onmove: (view: View, byHand: boolean) => void
): Camera {
	let view = start;
	const behaviour = zoom<HTMLElement, unknown>()
		.scaleExtent(SCALES)
		.extent(() => [
			[0, 0],
			[view.width, view.height]
		])
		.on('zoom', ({ transform, sourceEvent }: { transform: ZoomTransform; sourceEvent: Event | null }) => {
			view = viewOf(transform, view);
			onmove(view, sourceEvent !== null);
		});
	const target = select(surface);
	target.call(behaviour);
	target.call(behaviour.transform, transformOf(view));

	let request = 0;
	const jump = (next: View) => {
		cancelAnimationFrame(request);
		target.call(behaviour.transform, transformOf(next));
	};
	const glide = (to: View) => {
		if (still()) return jump(to);
		cancelAnimationFrame(request);
		const from = view;
		const startMs = performance.now();
		const step = () => {
			const t = Math.min(1, (performance.now() - startMs) / GLIDE_MS);
			target.call(behaviour.transform, transformOf(between(from, to, t)));
			if (t < 1) request = requestAnimationFrame(step);
		};
		request = requestAnimationFrame(step);
	};
	// A hand on the plan ends any glide.
	surface.addEventListener('pointerdown', () => cancelAnimationFrame(request));
	surface.addEventListener('wheel', () => cancelAnimationFrame(request), { passive: true });

	return {
		get view() {
			return view;
		},
		goTo(next, animate) {
			view = { ...view, width: next.width, height: next.height };
			if (animate) glide(next);
			else jump(next);
		},
		pan(dx, dy) {
			const { x, y } = view.centre;
			glide({ ...view, centre: { x: x + dx / view.pxPerM, y: y - dy / view.pxPerM } });
		},
		zoom(factor) {
			const [least, most] = SCALES;
			glide({ ...view, pxPerM: Math.min(most, Math.max(least, view.pxPerM * factor)) });
		},
		resize(width, height) {
			view = { ...view, width, height };
			jump(view);
		},
		close() {
			cancelAnimationFrame(request);
			target.on('.zoom', null);
		}
	};
}

/** A view on the way from one to another; t from 0 to 1. The scale goes by equal factors. */
export function between(from: View, to: View, t: number): View {
	return {
		...to,
		centre: {
			x: from.centre.x + (to.centre.x - from.centre.x) * t,
			y: from.centre.y + (to.centre.y - from.centre.y) * t
		},
		pxPerM: from.pxPerM * (to.pxPerM / from.pxPerM) ** t
	};
}

/** d3 maps (x, −y) of the floor to pixels by `k·p + t`. */
export function transformOf({ centre, pxPerM, width, height }: View): ZoomTransform {
	return zoomIdentity.translate(width / 2 - centre.x * pxPerM, height / 2 + centre.y * pxPerM).scale(pxPerM);
}

export function viewOf(
	{ k, x, y }: { k: number; x: number; y: number },
	size: { width: number; height: number }
): View {
	return {
		centre: { x: (size.width / 2 - x) / k, y: (y - size.height / 2) / k },
		pxPerM: k,
		width: size.width,
		height: size.height
	};
}
