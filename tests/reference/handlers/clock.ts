/* eslint-disable @typescript-eslint/no-explicit-any -- reference cases are plain JSON */
/** Reference kinds of clock offset and drift. */

import {
	computeOneWayMinimum,
	driftError,
	filterClock,
	fitSkew,
	readTwoWaySample
} from '../../../src/lib/domain/tracking/clock-samples.ts';

export const handlers: Record<string, (input: any) => unknown> = {
	ntp_sample: ({ T1, T2, T3, T4 }) => {
		const { offset, delay, low, high, valid } = readTwoWaySample(T1, T2, T3, T4);
		return { offset_s: offset, delay_s: delay, offset_low_s: low, offset_high_s: high, valid };
	},
	clock_filter: ({ samples }) => {
		const clock = filterClock(samples.map(([offset, delay, time]: any) => ({ offset, delay, time })));
		return (
			clock && {
				chosen_index_in_window: clock.chosen,
				offset_s: clock.offset,
				delay_s: clock.delay,
				dispersion_s: clock.dispersion,
				jitter_rms_s: clock.jitter,
				jitter_rfc_text_s: clock.jitterAsPrinted,
				distance_s: clock.distance,
				mean_offset_s: clock.mean,
				median_offset_s: clock.median
			}
		);
	},
	one_way_min: ({ stamps, arrivals }) => {
		const result = computeOneWayMinimum(stamps, arrivals);
		return (
			result && {
				min_difference_s: result.minimum,
				argmin: result.index,
				mean_difference_s: result.mean,
				excess_delay_s: result.excess
			}
		);
	},
	skew_lp: ({ stamps, arrivals }) => {
		const line = fitSkew(stamps, arrivals);
		return (
			line && {
				intercept_s: line.intercept,
				skew: line.skew,
				skew_ppm: line.skew * 1e6,
				support_points: line.support,
				cost_s: line.cost
			}
		);
	},
	drift_budget: ({ ppm, hours }) => ({ error_s: hours.map((hour: number) => driftError(ppm, hour * 3600)) })
};
