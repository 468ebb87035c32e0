import { describe, expect, it } from 'vitest';
import { flattenDesign } from './count-data.ts';
import { fitPoisson } from './glm.ts';
import { fitNegativeBinomial } from './negative-binomial.ts';

const DENSITY = [0.2, 0.5, 0.9, 1.1, 1.4, 1.8, 2.1, 2.4, 2.8, 0.3, 0.7, 1.3, 1.9, 2.2, 2.6, 0.4];
const HOURS = [2, 3, 1.5, 2.5, 1, 2, 3, 1, 2, 2, 1, 3, 2, 1.5, 2, 2.5];
const SPREAD = [0, 7, 1, 0, 4, 0, 19, 2, 25, 3, 0, 1, 14, 0, 9, 0];
const data = (counts: number[]) => ({ counts, exposures: HOURS, ...flattenDesign(DENSITY.map((d) => [1, d])) });

/** Log-likelihood written out as a product of its factors, free of gamma functions. */
function logLikelihood(counts: number[], intercept: number, slope: number, theta: number): number {
	return counts.reduce((sum, y, i) => {
		const mean = HOURS[i]! * Math.exp(intercept + slope * DENSITY[i]!);
		let log = theta * Math.log(theta / (theta + mean)) + y * Math.log(mean / (theta + mean));
		for (let k = 0; k < y; k++) log += Math.log((theta + k) / (k + 1));
		return sum + log;
	}, 0);
}

describe('fitNegativeBinomial', () => {
	it('stands at the top of the likelihood, in every direction', () => {
		const fit = fitNegativeBinomial(data(SPREAD));
		if (fit.kind === 'none') throw new Error(fit.reason);
		const [a, b] = [fit.coefficients[0]!, fit.coefficients[1]!];
		const top = logLikelihood(SPREAD, a, b, fit.theta);
		expect(fit.logLikelihood).toBeCloseTo(top, 9);
		for (const step of [-1e-3, 1e-3]) {
			expect(logLikelihood(SPREAD, a + step, b, fit.theta)).toBeLessThan(top);
			expect(logLikelihood(SPREAD, a, b + step, fit.theta)).toBeLessThan(top);
			expect(logLikelihood(SPREAD, a, b, fit.theta * (1 + step))).toBeLessThan(top);
		}
	});

	it('takes the error of theta from the curvature there', () => {
		const fit = fitNegativeBinomial(data(SPREAD));
		if (fit.kind === 'none') throw new Error(fit.reason);
		const at = (theta: number) => logLikelihood(SPREAD, fit.coefficients[0]!, fit.coefficients[1]!, theta);
		const h = fit.theta * 1e-3;
		const curvature = -(at(fit.theta + h) - 2 * at(fit.theta) + at(fit.theta - h)) / (h * h);
		expect(fit.thetaStandardError).toBeCloseTo(1 / Math.sqrt(curvature), 4);
	});

	it('has larger errors than Poisson on counts that vary more, and says that it fits better', () => {
		const fit = fitNegativeBinomial(data(SPREAD));
		const poisson = fitPoisson(data(SPREAD));
		if (fit.kind === 'none' || poisson.kind === 'none') throw new Error('no fit');
		expect(fit.standardErrors[1]).toBeGreaterThan(1.5 * poisson.standardErrors[1]!);
		expect(fit.likelihoodRatio).toBeCloseTo(2 * (fit.logLikelihood - poisson.logLikelihood), 9);
		expect(fit.likelihoodRatioP).toBeLessThan(1e-4);
		expect(fit.aic).toBeCloseTo(6 - 2 * fit.logLikelihood, 9);
	});

	it('is Poisson, with infinite theta, on counts that vary less', () => {
		const even = [1, 2, 1, 2, 1, 3, 5, 2, 5, 1, 1, 3, 4, 2, 4, 1];
		const fit = fitNegativeBinomial(data(even));
		const poisson = fitPoisson(data(even));
		if (poisson.kind === 'none') throw new Error(poisson.reason);
		expect(fit).toMatchObject({
			kind: 'fit',
			theta: Infinity,
			thetaStandardError: null,
			likelihoodRatio: 0,
			likelihoodRatioP: 1
		});
		expect(fit).toMatchObject({ coefficients: poisson.coefficients, deviance: poisson.deviance });
	});

	it('passes on why there is no estimate', () => {
		expect(fitNegativeBinomial(data(new Array(16).fill(0)))).toEqual({ kind: 'none', reason: 'no_events' });
	});
});
