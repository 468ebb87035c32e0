/**
 * How fast a crowd walks at a density: the relation of Weidmann 1993, *Transporttechnik der Fussgänger*, in
 * Kladek's form, v(ρ) = v₀·(1 − exp(−γ·(1/ρ − 1/ρ_max))); parameters as restated by Kretz, Lohmiller & Schlaich 2016.
 *
 * It is a mean for people walking one way. One person's speed cannot be inferred from it, and flow alone does not
 * give the density, since every flow below capacity occurs at two.
 */

/** m/s, walking freely. */
export const FREE_SPEED = 1.34;
/** persons/m²; here and above nobody moves. */
export const JAM_DENSITY = 5.4;
/** persons/m² */
const GAMMA = 1.913;

/** Mean walking speed in m/s at a density in persons/m²: 1.34 for 0 and below, 0 from 5.4 on. NaN stays NaN. */
export function speedOfDensity(density: number): number {
	if (density <= 0) return FREE_SPEED;
	if (density >= JAM_DENSITY) return 0;
	return FREE_SPEED * (1 - Math.exp(-GAMMA * (1 / density - 1 / JAM_DENSITY)));
}

/** Specific flow in persons/(m·s) at a density in persons/m²; 0 for 0 and below. */
export const flowOfDensity = (density: number): number => Math.max(0, density) * speedOfDensity(density);

/** Density in persons/m² at which people walk at `speed` m/s: 0 from 1.34 on, 5.4 for 0 and below. NaN stays NaN. */
export function densityOfSpeed(speed: number): number {
	if (speed >= FREE_SPEED) return 0;
	if (speed <= 0) return JAM_DENSITY;
	return 1 / (1 / JAM_DENSITY - Math.log1p(-speed / FREE_SPEED) / GAMMA);
}

export interface Capacity {
	/** persons/m² */
	readonly density: number;
	/** persons/(m·s) */
	readonly flow: number;
	/** m/s */
	readonly speed: number;
}

/** Greatest flow and where it occurs: the root of dq/dρ, halved until nothing changes. */
export function computeCapacity(): Capacity {
	const isRising = (density: number) => Math.exp(-GAMMA * (1 / density - 1 / JAM_DENSITY)) * (1 + GAMMA / density) < 1;
	let low = 1;
	let high = 3;
	for (let middle = 2; middle > low && middle < high; middle = (low + high) / 2) {
		if (isRising(middle)) low = middle;
		else high = middle;
	}
	return { density: low, flow: flowOfDensity(low), speed: speedOfDensity(low) };
}
