/** What a request says, checked. */

import { z } from 'zod';
import { Failure } from '../../domain/failure.ts';

/** Largest JSON body the API takes, bytes. */
const MOST_BODY_BYTES = 64 * 1024;

/**
 * The JSON body. A request without a body reads as `{}`.
 *
 * @throws Failure 'bad_input' with the issues as `details`
 */
export async function readBody<T>(request: Request, schema: z.ZodType<T>): Promise<T> {
	const text = await request.text();
	if (text.length > MOST_BODY_BYTES) throw new Failure('bad_input', 'The body is too large.');
	let value: unknown = {};
	try {
		if (text !== '') value = JSON.parse(text);
	} catch {
		throw new Failure('bad_input', 'The body is not JSON.');
	}
	return check(value, schema, 'The body is not valid.');
}

/**
 * The query of an address. A parameter with an empty value counts as not given, one given twice is refused.
 *
 * @throws Failure 'bad_input' with the issues as `details`
 */
export function readQuery<T>(url: URL, schema: z.ZodType<T>): T {
	const query: Record<string, string> = {};
	for (const [name, value] of url.searchParams) {
		if (Object.hasOwn(query, name)) throw new Failure('bad_input', `The parameter ${name} is given twice.`);
		if (value !== '') query[name] = value;
	}
	return check(query, schema, 'The query is not valid.');
}

function check<T>(value: unknown, schema: z.ZodType<T>, message: string): T {
	const { success, data, error } = schema.safeParse(value);
	if (success) return data;
	const details = error.issues.map(({ path, message }) => ({ at: path.join('.'), message }));
	throw new Failure('bad_input', message, details);
}

/** A number in a query. `z.coerce.number` alone would take `true`, `0x10` and spaces. */
export const queryNumber = z
	.string()
	.regex(/^-?\d{1,15}(\.\d{1,9})?$/, 'must be a number')
	.transform(Number);
export const queryInt = z
	.string()
	.regex(/^-?\d{1,15}$/, 'must be a whole number')
	.transform(Number);
/** Items per page: 1…200, 50 when not given. */
export const queryLimit = queryInt.pipe(z.int().min(1).max(200)).default(50);
