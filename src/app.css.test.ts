import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

const css = readFileSync(new URL('./app.css', import.meta.url), 'utf8');

/** Tokens of one theme: the block of the rule that starts with `rule`. */
function tokensAfter(rule: string): Map<string, string> {
	const block = css.slice(css.indexOf(rule)).split('}')[0] ?? '';
	return new Map(
		[...block.matchAll(/--color-([a-z-]+):\s*(#[0-9a-f]{6})/g)].map(([, name = '', hex = '']) => [name, hex])
	);
}

/** WCAG 2.2, relative luminance and contrast ratio; sRGB threshold 0.04045. */
function contrast(one: string, other: string): number {
	const luminance = (hex: string) =>
		[0.2126, 0.7152, 0.0722].reduce((sum, weight, i) => {
			const v = parseInt(hex.slice(1 + 2 * i, 3 + 2 * i), 16) / 255;
			return sum + weight * (v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4);
		}, 0);
	const [high = 0, low = 0] = [luminance(one), luminance(other)].sort((a, b) => b - a);
	return (high + 0.05) / (low + 0.05);
}

const day = tokensAfter('@theme {');
const night = tokensAfter(":root[data-theme='night'] {");
const system = tokensAfter(":root:not([data-theme='day']) {");

describe.each([
	['day', day],
	['night', night]
])('by %s', (_, tokens) => {
	const ratio = (one: string, other: string) => contrast(tokens.get(one) ?? '', tokens.get(other) ?? '');

	it.each(['ink', 'muted', 'tide', 'alert', 'caution'])(
		'text in %s is readable on every ground (4.5 : 1)',
		(colour) => {
			for (const ground of ['paper', 'sheet', 'floor', 'alert-wash', 'tide-wash']) {
				expect(ratio(colour, ground)).toBeGreaterThanOrEqual(4.5);
			}
		}
	);

	it('text on filled buttons is readable', () => {
		expect(ratio('on-fill', 'tide')).toBeGreaterThanOrEqual(4.5);
		expect(ratio('on-fill', 'alert')).toBeGreaterThanOrEqual(4.5);
	});

	it('lines that carry meaning stand out (3 : 1)', () => {
		for (const ground of ['paper', 'sheet', 'floor']) expect(ratio('rule', ground)).toBeGreaterThanOrEqual(3);
	});
});

it('night is the same whether chosen or taken from the system', () => {
	expect(system).toEqual(night);
	expect([...night.keys()].sort()).toEqual([...day.keys()].sort());
});
