/** Makes a canvas as large as the view, on screens of any pixel density. */

/** Device pixels per CSS pixel, at most: more costs time and nobody sees it. */
const MOST_PIXELS = 2;

/** A cleared context in CSS pixels; null when the browser gives none. */
export function sizeCanvas(
	canvas: HTMLCanvasElement,
	{ width, height }: { readonly width: number; readonly height: number }
): CanvasRenderingContext2D | null {
	const ratio = Math.min(devicePixelRatio || 1, MOST_PIXELS);
	const [w, h] = [Math.round(width * ratio), Math.round(height * ratio)];
	if (canvas.width !== w || canvas.height !== h) [canvas.width, canvas.height] = [w, h];
	const ctx = canvas.getContext('2d');
	ctx?.setTransform(ratio, 0, 0, ratio, 0, 0);
	ctx?.clearRect(0, 0, width, height);
	return ctx;
}
