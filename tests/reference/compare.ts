/** How a computed value is held to a reference value. */

export interface Tolerance {
	readonly abs?: number;
	readonly rel?: number;
}

/** What differs, one line each with its path; empty when everything expected is there and near enough. Extra keys in `got` do not matter. */
export function differences(got: unknown, expected: unknown, tolerance: Tolerance, path = ''): string[] {
	if (typeof expected === 'number' || expected === 'Infinity' || expected === '-Infinity') {
		return sameNumber(got, Number(expected), tolerance)
			? []
			: [`${path || 'value'} is ${show(got)}, expected ${expected}`];
	}
	if (Array.isArray(expected)) {
		if (!Array.isArray(got) || got.length !== expected.length) {
			return [`${path} has ${Array.isArray(got) ? got.length : 'no'} elements, expected ${expected.length}`];
		}
		return expected.flatMap((item, index) => differences(got[index], item, tolerance, `${path}[${index}]`));
	}
	if (expected !== null && typeof expected === 'object') {
		if (got === null || typeof got !== 'object') return [`${path} is ${show(got)}, expected an object`];
		const tied = (expected as Record<string, unknown>)['pairs_unique'] === false;
		return Object.entries(expected).flatMap(([key, value]) =>
			tied && CHOSEN_IN_A_TIE.has(key)
				? []
				: differences((got as Record<string, unknown>)[key], value, tolerance, path ? `${path}.${key}` : key)
		);
	}
	return got === expected ? [] : [`${path} is ${show(got)}, expected ${show(expected)}`];
}

/** What may differ between two right answers where a case says that its best matching is not the only one. */
const CHOSEN_IN_A_TIE = new Set(['pairs', 'unmatched_rows', 'unmatched_cols']);

function sameNumber(got: unknown, expected: number, { abs = 1e-9, rel = 1e-9 }: Tolerance): boolean {
	if (typeof got !== 'number' || Number.isNaN(got)) return false;
	if (!Number.isFinite(expected)) return got === expected;
	return Math.abs(got - expected) <= abs + rel * Math.abs(expected);
}

const show = (value: unknown): string => (value === undefined ? 'missing' : JSON.stringify(value));
