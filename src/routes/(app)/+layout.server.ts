import { redirect } from '@sveltejs/kit';
import { hasRole } from '$lib/server/auth/roles';
import { listFloors } from '$lib/server/repositories/floors';
import type { LayoutServerLoad } from './$types';

/** Who looks, and the floors there are. A page of one floor names its own venue instead of the first. */
export const load: LayoutServerLoad = async ({ locals }) => {
	if (!locals.user) redirect(303, '/sign-in');
	const floors = await listFloors(locals.app.db);
	const first = floors[0];
	return {
		user: {
			name: locals.user.name,
			role: locals.user.role,
			mayAcknowledge: hasRole(locals.user, 'operator'),
			mayReadRejected: hasRole(locals.user, 'maintainer', 'read')
		},
		floors: floors.map(({ key, name, venue_key, venue_name }) => ({
			key,
			name,
			venue: venue_key,
			venueName: venue_name
		})),
		venue: first
			? { key: first.venue_key, name: first.venue_name, timeZone: first.time_zone }
			: { key: '', name: 'No venue yet', timeZone: 'UTC' }
	};
};
