/** Hall's distances between people, as used for robots beside people. */

/** Zones by centre distance; `public` is everything beyond `social`. */
export type HallZone = 'intimate' | 'personal' | 'social' | 'public';

const INCH_M = 0.0254;

/**
 * Outer radii in m. `inches`: Hall 1966, The Hidden Dimension: 18 in, 48 in, 12 ft. `rounded`: as papers on robots print them.
 * The two differ by up to 6 cm: name the one used.
 */
export const HALL_RADII = {
	inches: { intimate: 18 * INCH_M, personal: 48 * INCH_M, social: 144 * INCH_M },
	rounded: { intimate: 0.45, personal: 1.2, social: 3.6 }
} as const;

export type HallScheme = keyof typeof HALL_RADII;

/** Zone of a centre distance in m. A distance on a bound belongs to the outer zone, with a guard of 1 pm against rounding. NaN gives null. */
export function computeHallZone(distance: number, scheme: HallScheme): HallZone | null {
	if (Number.isNaN(distance)) return null;
	const radii = HALL_RADII[scheme];
	for (const zone of ['intimate', 'personal', 'social'] as const) {
		if (distance < radii[zone] - 1e-12) return zone;
	}
	return 'public';
}
