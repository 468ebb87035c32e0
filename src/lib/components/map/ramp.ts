/**
 * Colours of density: one hue family of a watercolour wash, from bare floor to umber (by night from slate to sand),
 * with even steps of perceived lightness. Never green, never the alert colour.
 */

export type Theme = 'day' | 'night';

/** persons/m² at the dark end. Above it the colour stays: the queue table of Fruin (1971) starts its worst levels here. */
export const RAMP_MAX_PER_M2 = 3;
/** Density at each label of the legend, persons/m². */
export const RAMP_TICKS = [0, 1, 2, 3];

const STEPS = 256;

/** Lightness, chroma and hue (degrees) in OKLCH at both ends, and how much the middle is warmed. Chosen by us. */
const ENDS: Record<Theme, { from: Oklch; to: Oklch; warmth: number }> = {
	day: { from: [0.985, 0.01, 88], to: [0.36, 0.065, 48], warmth: 0.07 },
	night: { from: [0.235, 0.018, 245], to: [0.88, 0.085, 84], warmth: 0.03 }
};
/** Hue of the warming, degrees. */
const WARM = 62;

type Oklch = readonly [lightness: number, chroma: number, hueDegrees: number];

/** 256 colours, 3 bytes each, from 0 to `RAMP_MAX_PER_M2`. Straight through OKLab, so lightness moves evenly. */
export function computeRamp(theme: Theme): Uint8Array {
	const { from, to, warmth } = ENDS[theme];
	const table = new Uint8Array(STEPS * 3);
	for (let i = 0; i < STEPS; i++) {
		const t = i / (STEPS - 1);
		const mix = (axis: (degrees: number) => number) =>
			from[1] * axis(from[2]) * (1 - t) + to[1] * axis(to[2]) * t + warmth * 4 * t * (1 - t) * axis(WARM);
		table.set(srgbOf(from[0] + (to[0] - from[0]) * t, mix(cos), mix(sin)), i * 3);
	}
	return table;
}

/** The ramp as a CSS gradient from left to right. */
export function rampGradient(theme: Theme): string {
	const table = computeRamp(theme);
	const stops = Array.from({ length: 13 }, (_, i) => {
		const at = Math.round((i / 12) * (STEPS - 1)) * 3;
		return `rgb(${table[at]} ${table[at + 1]} ${table[at + 2]})`;
	});
	return `linear-gradient(to right, ${stops.join(', ')})`;
}

const cos = (degrees: number) => Math.cos((degrees * Math.PI) / 180);
const sin = (degrees: number) => Math.sin((degrees * Math.PI) / 180);

/** OKLab to sRGB bytes (Ottosson 2020, "A perceptual color space for image processing"), clipped to the gamut. */
function srgbOf(lightness: number, a: number, b: number): [number, number, number] {
	const l = (lightness + 0.3963377774 * a + 0.2158037573 * b) ** 3;
	const m = (lightness - 0.1055613458 * a - 0.0638541728 * b) ** 3;
	const s = (lightness - 0.0894841775 * a - 1.291485548 * b) ** 3;
	return [
		byte(4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s),
		byte(-1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s),
		byte(-0.0041960863 * l - 0.7034186147 * m + 1.707614701 * s)
	];
}

function byte(linear: number): number {
	const v = Math.min(1, Math.max(0, linear));
	return Math.round(255 * (v <= 0.0031308 ? 12.92 * v : 1.055 * v ** (1 / 2.4) - 0.055));
}
