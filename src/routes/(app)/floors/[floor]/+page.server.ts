import { error } from '@sveltejs/kit';
import type { Plan, RobotShape } from '$lib/components/map/plan';
import { requirePageRole } from '$lib/server/http/require-role';
import { readFloor } from '$lib/server/repositories/floors';
import { readRobots } from '$lib/server/repositories/robots';
import type { PageServerLoad } from './$types';

/** A floor as it stands still; what moves comes over the live stream. */
export const load: PageServerLoad = async ({ locals, params }) => {
	requirePageRole(locals, 'display', 'read');
	const stored = await readFloor(locals.app.db, params.floor);
	if (!stored) error(404, 'There is no floor of this name.');
	const { floor, venue, labels } = stored;
	const plan: Plan = {
		key: floor.key,
		name: floor.name,
		walkable: floor.walkable,
		walls: floor.walls,
		labels,
		zones: floor.zones.map(({ key, name, polygon, threshold, private: closed }) => ({
			key,
			name,
			polygon,
			threshold,
			private: closed
		}))
	};
	const robots: RobotShape[] = (await readRobots(locals.app.db, [venue.key])).map(({ robot }) => ({
		key: robot.key,
		mark: robot.mark,
		model: robot.model.name,
		length: robot.model.length,
		width: robot.model.width
	}));
	return { plan, robots, venue: { key: venue.key, name: venue.name, timeZone: venue.time_zone } };
};
