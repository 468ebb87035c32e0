import { expect, it } from 'vitest';
import { flattenDesign } from './count-data.ts';
import { fitPoisson, type PoissonFit } from './glm.ts';
import { compareRates } from './rate-ratio.ts';

const slopeOf = (rows: readonly { count: number; hours: number; density: number }[]): number => {
	const fit = fitPoisson({
		counts: Float64Array.from(rows, ({ count }) => count),
		exposures: Float64Array.from(rows, ({ hours }) => hours),
		...flattenDesign(rows.map(({ density }) => [1, density]))
	}) as PoissonFit;
	return fit.coefficients[1]!;
};

it('trap "zone mix changes cause Simpson reversals": better in each zone, worse together', () => {
	// Before: mostly in the calm hall. After: mostly in the busy one, with a lower rate in either.
	const before = { calm: { count: 20, exposure: 200 }, busy: { count: 20, exposure: 20 } };
	const after = { calm: { count: 1, exposure: 20 }, busy: { count: 160, exposure: 200 } };
	const ratio = (now: { count: number; exposure: number }, then: { count: number; exposure: number }) =>
		now.count / now.exposure / (then.count / then.exposure);
	expect(ratio(after.calm, before.calm)).toBeLessThan(1);
	expect(ratio(after.busy, before.busy)).toBeLessThan(1);
	const together = compareRates({ count: 161, exposure: 220 }, { count: 40, exposure: 220 });
	expect(together.ratio).toBeGreaterThan(4);
});

it('trap "measurement error in density flattens the slope": the same halts against a blurred density', () => {
	const densities = [0.1, 0.4, 0.7, 1, 1.3, 1.6, 1.9];
	const exact = densities.map((density) => ({
		density,
		hours: 400,
		count: 2 * Math.round(200 * 0.05 * Math.exp(density))
	}));
	// Every hour is seen with an error of ±0.5/m², alternately, so each row splits in two.
	const blurred = exact.flatMap(({ density, hours, count }) =>
		[-0.5, 0.5].map((error) => ({ density: density + error, hours: hours / 2, count: count / 2 }))
	);
	expect(slopeOf(exact)).toBeCloseTo(1, 1);
	expect(slopeOf(blurred)).toBeLessThan(0.8 * slopeOf(exact));
	expect(slopeOf(blurred)).toBeGreaterThan(0.3);
});
