/** Sorting of table rows. Pure. */

export type Value = string | number | null;

/**
 * Rows by a value, stable; what is not known comes last either way up, because it is neither small nor large.
 */
export function sortRows<Row>(rows: readonly Row[], value: (row: Row) => Value, descending: boolean): readonly Row[] {
	const sign = descending ? -1 : 1;
	return rows.toSorted((a, b) => {
		const [x, y] = [value(a), value(b)];
		if (x === null || y === null) return Number(x === null) - Number(y === null);
		if (typeof x === 'number' && typeof y === 'number') return sign * (x - y);
		return sign * String(x).localeCompare(String(y), 'en', { numeric: true });
	});
}

/** Rows in a remembered order of keys; rows that are not remembered come last. */
export function keepOrder<Row>(
	rows: readonly Row[],
	key: (row: Row) => string,
	order: readonly string[]
): readonly Row[] {
	const place = new Map(order.map((name, i) => [name, i]));
	return rows.toSorted((a, b) => (place.get(key(a)) ?? order.length) - (place.get(key(b)) ?? order.length));
}
