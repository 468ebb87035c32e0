import { hasRole } from '$lib/server/auth/roles';
import { requirePageRole } from '$lib/server/http/require-role';
import { listFloors } from '$lib/server/repositories/floors';
import type { LayoutServerLoad } from './$types';

/** Who looks, and the floors there are. A page of one floor names its own venue instead of the first. */
export const load: LayoutServerLoad = async ({ locals }) => {
	const user = requirePageRole(locals, 'display', 'read');
	const floors = await listFloors(locals.app.db);
	const first = floors[0];
	return {
		user: {
			name: user.name,
			role: user.role,
			mayAcknowledge: hasRole(user, 'operator'),
			mayForget: hasRole(user, 'maintainer'),
			mayReadRejected: hasRole(user, 'maintainer', 'read')
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
