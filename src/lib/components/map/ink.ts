/** Colours for what is drawn on canvas, read from the same tokens that CSS uses. */

import type { Theme } from './ramp.ts';

export interface Ink {
	readonly theme: Theme;
	readonly paper: string;
	readonly floor: string;
	readonly sheet: string;
	readonly ink: string;
	readonly muted: string;
	readonly hairline: string;
	readonly rule: string;
	readonly tide: string;
	readonly alert: string;
	readonly caution: string;
	readonly onFill: string;
	readonly sans: string;
}

/** The tokens in force now. */
export function readInk(): Ink {
	const style = getComputedStyle(document.documentElement);
	const token = (name: string) => style.getPropertyValue(name).trim();
	return {
		theme: style.colorScheme === 'dark' ? 'night' : 'day',
		paper: token('--color-paper'),
		floor: token('--color-floor'),
		sheet: token('--color-sheet'),
		ink: token('--color-ink'),
		muted: token('--color-muted'),
		hairline: token('--color-hairline'),
		rule: token('--color-rule'),
		tide: token('--color-tide'),
		alert: token('--color-alert'),
		caution: token('--color-caution'),
		onFill: token('--color-on-fill'),
		sans: token('--font-sans')
	};
}

/** Calls back with the tokens whenever the theme changes, by choice or by the system; the returned function ends it. */
export function watchInk(onchange: (ink: Ink) => void): () => void {
	const tell = () => onchange(readInk());
	const system = matchMedia('(prefers-color-scheme: dark)');
	const chosen = new MutationObserver(tell);
	system.addEventListener('change', tell);
	chosen.observe(document.documentElement, { attributes: true, attributeFilter: ['data-theme'] });
	return () => {
		system.removeEventListener('change', tell);
		chosen.disconnect();
	};
}
