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

	const glide = () => target.transition().duration(still() ? 0 : GLIDE_MS);
	return {
		get view() {
			return view;
		},
		goTo(next, animate) {
			view = { ...view, width: next.width, height: next.height };
			if (animate && !still()) glide().call(behaviour.transform, transformOf(next));
			else target.interrupt().call(behaviour.transform, transformOf(next));
		},
		pan(dx, dy) {
			glide().call(behaviour.translateBy, -dx / view.pxPerM, -dy / view.pxPerM);
		},
		zoom(factor) {
			glide().call(behaviour.scaleBy, factor);
		},
		resize(width, height) {
			view = { ...view, width, height };
			target.interrupt().call(behaviour.transform, transformOf(view));
		},
		close() {
			target.interrupt().on('.zoom', null);
		}
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
