/** Puts small labels beside their marks without writing one over another. Pure. */

export interface LabelWish {
	readonly key: string;
	/** px, middle of the mark */
	readonly x: number;
	readonly y: number;
	/** px from the middle to the label's near edge */
	readonly gap: number;
	readonly width: number;
	readonly height: number;
	/** Written even over others: something is wrong with it, or it is selected. */
	readonly must: boolean;
}

export type Side = 'right' | 'left' | 'above' | 'below';

export interface PlacedLabel {
	readonly key: string;
	readonly side: Side;
	/** px, left end and vertical middle of the text */
	readonly x: number;
	readonly y: number;
}

export interface Box {
	/** px, upper left corner */
	readonly x: number;
	readonly y: number;
	readonly w: number;
	readonly h: number;
}

const SIDES: readonly Side[] = ['right', 'left', 'below', 'above'];

/**
 * Places the wishes in the order given, each on the first free side, trying the side it had before first so that
 * labels do not hop. One without a free side is left out, unless it must be written: then it goes where it covers
 * least.
 *
 * @param written boxes that are written on already
 * @param view px; labels stay inside
 */
export function placeLabels(
	wishes: readonly LabelWish[],
	before: ReadonlyMap<string, Side>,
	written: readonly Box[] = [],
	view: { readonly width: number; readonly height: number } = { width: Infinity, height: Infinity }
): PlacedLabel[] {
	const taken: Box[] = [
		...written,
		...wishes.map(({ x, y, gap }) => ({ x: x - gap / 2, y: y - gap / 2, w: gap, h: gap }))
	];
	const placed: PlacedLabel[] = [];
	for (const wish of wishes) {
		const had = before.get(wish.key);
		const order = had ? [had, ...SIDES.filter((side) => side !== had)] : SIDES;
		const inside = order.filter((side) => isInside(boxAt(wish, side), view));
		const free = inside.find((side) => !taken.some((box) => overlaps(box, boxAt(wish, side))));
		if (!free && !wish.must) continue;
		const side = free ?? leastCovered(wish, inside, taken);
		const box = boxAt(wish, side);
		taken.push(box);
		placed.push({ key: wish.key, side, x: box.x, y: box.y + box.h / 2 });
	}
	return placed;
}

function leastCovered(wish: LabelWish, sides: readonly Side[], taken: readonly Box[]): Side {
	let best: Side = 'right';
	let least = Infinity;
	for (const side of sides) {
		const covered = taken.reduce((sum, box) => sum + sharedArea(box, boxAt(wish, side)), 0);
		if (covered < least) [best, least] = [side, covered];
	}
	return best;
}

function boxAt({ x, y, gap, width: w, height: h }: LabelWish, side: Side): Box {
	switch (side) {
		case 'right':
			return { x: x + gap, y: y - h / 2, w, h };
		case 'left':
			return { x: x - gap - w, y: y - h / 2, w, h };
		case 'above':
			return { x: x - w / 2, y: y - gap - h, w, h };
		case 'below':
			return { x: x - w / 2, y: y + gap, w, h };
	}
}

const overlaps = (a: Box, b: Box) => sharedArea(a, b) > 0;

function sharedArea(a: Box, b: Box): number {
	const w = Math.min(a.x + a.w, b.x + b.w) - Math.max(a.x, b.x);
	const h = Math.min(a.y + a.h, b.y + b.h) - Math.max(a.y, b.y);
	return w > 0 && h > 0 ? w * h : 0;
}

const isInside = ({ x, y, w, h }: Box, view: { readonly width: number; readonly height: number }) =>
	view.width === Infinity || (x >= 0 && y >= 0 && x + w <= view.width && y + h <= view.height);
