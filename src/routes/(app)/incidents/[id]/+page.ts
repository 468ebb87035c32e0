import { error } from '@sveltejs/kit';
import { AnswerError, readIncident } from '$lib/state/api';
import type { PageLoad } from './$types';

/** One incident with its evidence. */
export const load: PageLoad = async ({ fetch, params }) => {
	try {
		return { incident: await readIncident(params.id, fetch) };
	} catch (cause) {
		if (cause instanceof AnswerError && cause.status === 404) error(404, 'There is no incident of this name.');
		throw cause;
	}
};
