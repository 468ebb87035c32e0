import { describe, expect, it } from 'vitest';
import { computeRamp, rampGradient, type Theme } from './ramp.ts';

/** CIE 1976 lightness L* of sRGB bytes (CIE 15:2004; sRGB luminance of IEC 61966-2-1; from memory): another measure than the ramp is made with. */
function lightnessOf(table: Uint8Array, i: number): number {
	const [r, g, b] = [0, 1, 2].map((c) => {
		const v = (table[i * 3 + c] ?? 0) / 255;
		return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4;
	}) as [number, number, number];
	const y = 0.2126 * r + 0.7152 * g + 0.0722 * b;
	return y > 0.008856 ? 116 * Math.cbrt(y) - 16 : 903.3 * y;
}

describe.each<Theme>(['day', 'night'])('the ramp by %s', (theme) => {
	const table = computeRamp(theme);
	const light = Array.from({ length: 17 }, (_, i) => lightnessOf(table, Math.round((i * 255) / 16)));
	const steps = light.slice(1).map((value, i) => value - (light[i] ?? 0));

	it('goes one way only: darker by day, brighter by night', () => {
		expect(steps.every((step) => (theme === 'day' ? step < 0 : step > 0))).toBe(true);
	});

	it('has even steps of lightness, within a quarter of their mean', () => {
		const mean = steps.reduce((sum, step) => sum + step, 0) / steps.length;
		for (const step of steps) expect(Math.abs(step / mean - 1)).toBeLessThan(0.25);
	});

	it('is never green, which would read as safe', () => {
		for (let i = 0; i < 256; i++) {
			const [r = 0, g = 0, b = 0] = table.subarray(i * 3, i * 3 + 3);
			expect(g > r + 4 && g > b + 4).toBe(false);
		}
	});
});

it('gives a gradient that starts at bare floor', () => {
	expect(rampGradient('day')).toMatch(/^linear-gradient\(to right, rgb\(25\d 2[45]\d 24\d\)/);
});
