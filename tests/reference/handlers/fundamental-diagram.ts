/* eslint-disable @typescript-eslint/no-explicit-any -- reference inputs are plain JSON */
import {
	computeCapacity,
	densityOfSpeed,
	flowOfDensity,
	speedOfDensity
} from '../../../src/lib/domain/density/fundamental-diagram.ts';

const speed_flow = ({ density }: any) => ({
	speed_m_s: speedOfDensity(density),
	flow_p_m_s: flowOfDensity(density),
	flow_p_m_min: 60 * flowOfDensity(density)
});

const density_from_speed = ({ speed_m_s }: any) => ({ density: densityOfSpeed(speed_m_s) });

function capacity() {
	const { density, flow, speed } = computeCapacity();
	return {
		density_at_capacity: density,
		capacity_p_m_s: flow,
		capacity_p_m_min: 60 * flow,
		speed_at_capacity: speed
	};
}

export const handlers: Record<string, (input: any) => unknown> = { speed_flow, density_from_speed, capacity };
