/** Cursors of paged lists: where the next page begins. Opaque to clients, stable while rows are added. */

import { z } from 'zod';

export interface Cursor<Id extends string | number> {
	readonly atMs: number;
	readonly id: Id;
}

const encodeCursor = ({ atMs, id }: Cursor<string | number>): string =>
	Buffer.from(JSON.stringify([atMs, id])).toString('base64url');

/** The text of a cursor as a query parameter. */
const cursor = <Id extends string | number>(id: z.ZodType<Id>) =>
	z
		.string()
		.max(200)
		.transform((text, context): Cursor<Id> => {
			const parsed = z.tuple([z.int(), id]).safeParse(decode(text));
			if (parsed.success) return { atMs: parsed.data[0], id: parsed.data[1] };
			context.addIssue('is not a cursor of this list');
			return z.NEVER;
		});

export const textCursor = cursor(z.string());
export const numberCursor = cursor(z.int());

function decode(text: string): unknown {
	try {
		return JSON.parse(Buffer.from(text, 'base64url').toString());
	} catch {
		return null;
	}
}

/** Splits rows read with one more than `limit` into a page and the cursor of the next. */
export function page<Row, Id extends string | number>(
	rows: readonly Row[],
	limit: number,
	cursorOf: (row: Row) => Cursor<Id>
): { readonly rows: readonly Row[]; readonly next: string | null } {
	const last = rows[limit - 1];
	const more = rows.length > limit && last !== undefined;
	return { rows: rows.slice(0, limit), next: more ? encodeCursor(cursorOf(last)) : null };
}

/** `Link: <…>; rel="next"` (RFC 8288) for the address of this page. */
export function nextLink(url: URL, next: string | null): Record<string, string> {
	if (next === null) return {};
	const query = new URLSearchParams(url.searchParams);
	query.set('cursor', next);
	return { link: `<${url.pathname}?${query}>; rel="next"` };
}
