/* eslint-disable @typescript-eslint/no-explicit-any -- reference inputs are plain JSON */
import { personMeanDensity, shareOfTimeAt, timeMeanDensity } from '../../../src/lib/domain/density/averaging.ts';
import {
	flowFromPerMinuteFoot,
	levelOfDensity,
	levelOfFlow,
	levelOfSpace,
	perMinuteFootFromFlow,
	SCHEME_NAMES,
	squareMetresFromFeet
} from '../../../src/lib/domain/density/level-of-service.ts';

const los_space = ({ scheme, space, unit }: any) => ({
	los: levelOfSpace(scheme, unit === 'ft2/p' ? squareMetresFromFeet(Number(space)) : Number(space))
});

const los_density = ({ scheme, density }: any) =>
	scheme === 'all'
		? Object.fromEntries(SCHEME_NAMES.map((name) => [name, levelOfDensity(name, density)]))
		: { los: levelOfDensity(scheme, density) };

const los_flow = ({ scheme, flow_ped_min_ft }: any) => ({
	los: levelOfFlow(scheme, flowFromPerMinuteFoot(flow_ped_min_ft))
});

const los_flow_metric = ({ scheme, flow_ped_min_m }: any) => ({
	flow_ped_min_ft: perMinuteFootFromFlow(flow_ped_min_m / 60),
	los: levelOfFlow(scheme, flow_ped_min_m / 60)
});

const conversion = ({ ft2 }: any) => ({ m2: squareMetresFromFeet(ft2) });

function averaging({ samples_density_duration_s, scheme = 'fruin_walkway' }: any) {
	const samples = samples_density_duration_s.map(([density, duration]: [number, number]) => ({ density, duration }));
	const timeMean = timeMeanDensity(samples);
	const personMean = personMeanDensity(samples);
	return {
		time_weighted_density: timeMean,
		los_of_time_mean: levelOfDensity(scheme, timeMean),
		person_weighted_density: personMean,
		los_of_person_mean: levelOfDensity(scheme, personMean),
		share_of_time_in_F: shareOfTimeAt('F', scheme, samples)
	};
}

export const handlers: Record<string, (input: any) => unknown> = {
	los_space,
	los_density,
	los_flow,
	los_flow_metric,
	conversion,
	averaging
};
