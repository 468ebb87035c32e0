/** An expected failure: something a caller can be told in words. Anything else that is thrown is a bug. */

export type FailureCode =
	| 'bad_input'
	| 'unauthenticated'
	| 'forbidden'
	| 'not_found'
	| 'conflict'
	| 'too_many_requests'
	| 'unavailable'
	| 'storage';

export class Failure extends Error {
	override readonly name = 'Failure';

	constructor(
		readonly code: FailureCode,
		message: string,
		readonly details?: unknown,
		options?: ErrorOptions
	) {
		super(message, options);
	}
}
