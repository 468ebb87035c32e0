/** The scale bar of the title block: a round number of metres at the length it has on the plan now. */

export interface ScaleBar {
	readonly metres: number;
	readonly px: number;
}

const STEPS = [5, 2, 1];

/**
 * The longest bar of 1, 2 or 5 × 10ⁿ m that is no longer than `maxPx`.
 *
 * @param pxPerM positive; anything else has no bar
 */
export function computeScaleBar(pxPerM: number, maxPx: number): ScaleBar | null {
	const most = maxPx / pxPerM;
	if (!(most > 0) || !Number.isFinite(most)) return null;
	const decade = 10 ** Math.floor(Math.log10(most));
	const step = STEPS.find((one) => one * decade <= most) ?? 1;
	return { metres: step * decade, px: step * decade * pxPerM };
}
