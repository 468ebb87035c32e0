/** What is known of a zone, in words: the same on its card and in the table. */

import { SCHEMES, type LevelOfServiceScheme } from '../../domain/density/level-of-service.ts';
import type { LiveZone } from '../../contracts/live.ts';
import { density, people, share, squareMetres } from '../ui/format.ts';

/** Always reachable where density is shown. */
export const DENSITY_CAUTION =
	'Density comes from robots’ sensors, a sample. It supports planning and is not a safety verdict: the venue’s own crowd-safety plan and competent people decide.';

/** `C (Fruin, walkway)`: a letter says nothing without its scheme. */
export function describeLevel({ level, scheme }: LiveZone): string {
	if (level === null) return 'not measured';
	return `${level} (${SCHEMES[scheme as LevelOfServiceScheme]?.name ?? scheme})`;
}

export function zoneFacts(zone: LiveZone): [string, string][] {
	if (zone.private) return [['Kept and shown', 'nothing: this zone is private']];
	return [
		['Density', density(zone.density_per_m2)],
		['By count', density(zone.classic_per_m2)],
		['Level of service', describeLevel(zone)],
		['Coverage', `${share(zone.coverage)}, ${squareMetres(zone.observed_m2)} observed`],
		['Seen now', zone.observed_m2 > 0 ? people(zone.persons) : 'not measured'],
		['Threshold', zone.threshold_per_m2 === null ? 'none set' : density(zone.threshold_per_m2)]
	];
}
