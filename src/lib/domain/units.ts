/** Conversions at the edge: milliseconds and degrees outside, seconds and radians inside. */

export const secondsFromMs = (ms: number): number => ms / 1000;
export const msFromSeconds = (seconds: number): number => Math.round(seconds * 1000);

/** 1 ft² in m², exact. */
export const SQUARE_FOOT_M2 = 0.09290304;

/** An angle brought to (−π, π]. NaN stays NaN. */
export function wrapAngle(angle: number): number {
	const turned = angle - 2 * Math.PI * Math.floor((angle + Math.PI) / (2 * Math.PI));
	return turned <= -Math.PI ? turned + 2 * Math.PI : turned;
}
