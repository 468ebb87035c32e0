/* eslint-disable @typescript-eslint/no-explicit-any */
import { computeHallZone } from '../../../src/lib/domain/conduct/proxemics.ts';
import { computeEncounters } from '../../../src/lib/domain/conduct/separation.ts';
import { computeTimeToCollision } from '../../../src/lib/domain/conduct/time-to-collision.ts';
import { computeTrip } from '../../../src/lib/domain/conduct/trajectory.ts';

const path = (rows: [number, number, number][]) => rows.map(([time, x, y]) => ({ time, x, y }));
const point = ([x, y]: [number, number]) => ({ x, y });

function trajectory({ robot, people, parameters: set }: any) {
	const trip = computeTrip(path(robot), {
		goal: point(set.goal),
		goalRadius: set.goal_radius_m,
		referenceLength: set.reference_length_m,
		preferredSpeed: set.preferred_speed_m_s,
		stallSpeed: set.stall_speed_m_s,
		stallMinDuration: set.stall_min_duration_s,
		minStep: set.min_step_m,
		initialHeading: set.initial_heading_rad
	});
	return {
		path_length_m: trip.pathLength,
		displacement_m: trip.displacement,
		path_length_ratio: trip.pathLengthRatio,
		path_efficiency: trip.pathEfficiency,
		detour_m: trip.detour,
		success: trip.success,
		time_to_goal_s: trip.timeToGoal,
		ideal_time_s: trip.idealTime,
		time_to_goal_ratio: trip.timeToGoalRatio,
		spl: trip.successByPathLength,
		mean_speed_m_s: trip.meanSpeed,
		stalled_time_s: trip.stalledTime,
		stall_episodes: trip.stallEpisodes,
		cumulative_heading_change_rad: trip.headingChange,
		signed_heading_sum_rad: trip.signedHeadingChange,
		path_irregularity_rad_m: trip.pathIrregularity,
		mean_goal_heading_error_rad: trip.meanGoalHeadingError,
		...encounters(robot, people, set)
	};
}

function encounters(robot: any, people: any, set: any) {
	const found = computeEncounters(path(robot), Object.values(people ?? {}).map(path as any) as any, {
		robotRadius: set.robot_radius_m,
		personRadius: set.person_radius_m,
		spaceThreshold: set.space_compliance_m,
		movingSpeed: set.stall_speed_m_s
	});
	if (!found) return {};
	const { separation, within } = found;
	return {
		min_separation_centre_m: separation.centre,
		min_separation_surface_m: separation.surface,
		min_separation_centre_sampled_m: separation.sampledCentre,
		time_within_intimate_s: within.intimate.time,
		person_seconds_within_intimate: within.intimate.personSeconds,
		time_within_personal_s: within.personal.time,
		person_seconds_within_personal: within.personal.personSeconds,
		time_within_social_s: within.social.time,
		person_seconds_within_social: within.social.personSeconds,
		personal_space_time_share: found.personalShare,
		share_of_time_below_space_threshold: found.shareBelowThreshold,
		share_of_time_at_or_above_space_threshold: found.shareAtOrAboveThreshold,
		min_time_to_collision_s: found.leastTimeToCollision
	};
}

function timeToCollision({ relative_position, relative_velocity, radius_sum }: any) {
	return { ttc_s: computeTimeToCollision(point(relative_position), point(relative_velocity), radius_sum) };
}

function zone({ distance_m }: any) {
	return {
		zone_rounded_m: computeHallZone(distance_m, 'rounded'),
		zone_hall_inches: computeHallZone(distance_m, 'inches')
	};
}

export const handlers = { trajectory, ttc: timeToCollision, zone };
