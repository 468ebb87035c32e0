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

interface Box {
	readonly x: number;
	readonly y: number;
	readonly w: number;
	readonly h: number;
}

const SIDES: readonly Side[] = ['right', 'left', 'below', 'above'];

/**
 * Places the wishes in the order given, each on the first free side, trying the side it had before first so that
 * labels do not hop. One without a free side is left out, unless it must be written: then it goes to the right.
 */
export function placeLabels(wishes: readonly LabelWish[], before: ReadonlyMap<string, Side>): PlacedLabel[] {
	const taken: Box[] = wishes.map(({ x, y, gap }) => ({ x: x - gap / 2, y: y - gap / 2, w: gap, h: gap }));
	const placed: PlacedLabel[] = [];
	for (const wish of wishes) {
		const had = before.get(wish.key);
		const order = had ? [had, ...SIDES.filter((side) => side !== had)] : SIDES;
		const free = order.find((side) => !taken.some((box) => overlaps(box, boxAt(wish, side))));
		if (!free && !wish.must) continue;
		const side = free ?? had ?? 'right';
		const box = boxAt(wish, side);
		taken.push(box);
		placed.push({ key: wish.key, side, x: box.x, y: box.y + box.h / 2 });
	}
	return placed;
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

const overlaps = (a: Box, b: Box) => a.x < b.x + b.w && b.x < a.x + a.w && a.y < b.y + b.h && b.y < a.y + a.h;
