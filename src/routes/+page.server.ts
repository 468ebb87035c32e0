import { error, redirect } from '@sveltejs/kit';
import { listFloors } from '$lib/server/repositories/floors';
import type { PageServerLoad } from './$types';

/** The desk opens on the first floor. */
export const load: PageServerLoad = async ({ locals }) => {
	if (!locals.user) redirect(303, '/sign-in');
	const first = (await listFloors(locals.app.db, 1))[0];
	if (!first) error(404, 'No floor has been set up yet.');
	redirect(303, `/floors/${encodeURIComponent(first.key)}`);
};
