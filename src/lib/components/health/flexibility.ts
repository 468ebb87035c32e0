/** Words for what was learned about how people give way. */

import type { LiveFlexibility } from '../../contracts/live.ts';

const speed = (value: number): string => `${value.toFixed(2)}\u00a0m/s`;

export function flexibilityInWords({ value_m_s, n, learned, noise_floor_m_s }: LiveFlexibility): string {
	const windows = `${n} ${n === 1 ? 'window' : 'windows'} of people walking near a robot`;
	if (!learned) return `Not known yet (${windows} so far): the default of ${speed(value_m_s)} is used.`;
	return `By ${speed(value_m_s)}, learned from ${windows}. Inaccuracy of the tracks alone would give ${speed(noise_floor_m_s)}.`;
}
