/* eslint-disable @typescript-eslint/no-explicit-any -- reference cases are plain JSON of many shapes */
/** Reference cases of rates and statistics: names mapped, nothing computed. */

import { computeClusterRobust } from '../../../src/lib/domain/statistics/cluster-robust.ts';
import { flattenDesign, type CountData } from '../../../src/lib/domain/statistics/count-data.ts';
import { computeEventsNeeded, computeExactPower, computeHours } from '../../../src/lib/domain/statistics/exposure.ts';
import {
	computeWaldInterval,
	fitPoisson,
	predictRate,
	testAgainstCommonRate,
	testCoefficients
} from '../../../src/lib/domain/statistics/glm.ts';
import {
	computeClopperPearsonInterval,
	computeGarwoodInterval,
	computeMidPInterval,
	computeWilsonInterval
} from '../../../src/lib/domain/statistics/intervals.ts';
import { fitIsotonic, fitIsotonicRates } from '../../../src/lib/domain/statistics/isotonic.ts';
import {
	adjustBenjaminiHochberg,
	adjustBenjaminiYekutieli,
	adjustBonferroni,
	adjustHolm,
	rejectAt
} from '../../../src/lib/domain/statistics/multiple-testing.ts';
import { fitNegativeBinomial } from '../../../src/lib/domain/statistics/negative-binomial.ts';
import { computeProfileInterval } from '../../../src/lib/domain/statistics/profile.ts';
import { computeQuantileRanks, computeQuantiles } from '../../../src/lib/domain/statistics/quantile.ts';
import { compareRates } from '../../../src/lib/domain/statistics/rate-ratio.ts';
import { testPoissonTrend, testProportionTrend } from '../../../src/lib/domain/statistics/trend.ts';

const countData = (input: any): CountData => ({
	counts: input.count,
	exposures: input.exposure,
	...flattenDesign(input.X)
});

const squareRows = (flat: Float64Array, p: number) =>
	Array.from({ length: p }, (_, i) => Array.from(flat.subarray(i * p, (i + 1) * p)));

/** Base rates per hour for which the tables of hours are given. */
const TABLE_RATES = [0.02, 0.05, 0.1, 0.2, 0.5, 1];

export const handlers: Record<string, (input: any) => unknown> = {
	poisson_ci({ count, exposure = 1, conf = 0.95 }) {
		const exact = computeGarwoodInterval(count, exposure, conf);
		const mid = computeMidPInterval(count, exposure, conf);
		const { estimate: rate, lower, upper } = exact;
		return { rate, lower, upper, lower_midp: mid.lower, upper_midp: mid.upper };
	},

	rate_ratio({ x1, t1, x2, t2, null_ratio = 1, conf = 0.95 }) {
		const options = { nullRatio: null_ratio, confidence: conf };
		const result = compareRates({ count: x1, exposure: t1 }, { count: x2, exposure: t2 }, options);
		return {
			rate_ratio: result.ratio,
			p_minlike: result.minLikelihoodP,
			p_central: result.central.p,
			p_midp: result.midP.p,
			ci_lower: result.central.lower,
			ci_upper: result.central.upper,
			ci_midp_lower: result.midP.lower,
			ci_midp_upper: result.midP.upper,
			wald_lower: result.wald?.lower ?? null,
			wald_upper: result.wald?.upper ?? null,
			null_p: result.nullShare
		};
	},

	poisson_glm(input) {
		const fit = fitPoisson(countData(input));
		if (fit.kind === 'none') return fit;
		const p = fit.rows.columns;
		const tests = testCoefficients(fit);
		const ratio = testAgainstCommonRate(fit);
		const column = input.profile_column ?? p - 1;
		const wald = computeWaldInterval(fit, column);
		const profile = computeProfileInterval(fit, column);
		const predicted = (input.predict_X ?? []).map((row: number[]) => predictRate(fit, row));
		const unit = Array.from({ length: p }, (_, j) => (j === column ? 1 : 0));
		return {
			coef: Array.from(fit.coefficients),
			se: Array.from(fit.standardErrors),
			z: tests.map(({ z }) => z),
			p: tests.map((test) => test.p),
			vcov: squareRows(fit.covariance, p),
			deviance: fit.deviance,
			null_deviance: fit.nullDeviance,
			df_residual: fit.df,
			pearson_chi2: fit.pearson,
			dispersion: fit.dispersion,
			loglik: fit.logLikelihood,
			aic: fit.aic,
			lrt_vs_intercept: ratio.chi2,
			lrt_df: ratio.df,
			lrt_p: ratio.p,
			quasi_se: tests.map(({ quasiStandardError }) => quasiStandardError),
			quasi_t: tests.map(({ quasiT }) => quasiT),
			quasi_p: tests.map(({ quasiP }) => quasiP),
			rate_ratio_per_unit: predictRate(fit, unit).rate,
			wald_ci_log: [wald.lower, wald.upper],
			profile_ci_log: [profile.lower, profile.upper],
			predicted_rate: predicted.map(({ rate }: any) => rate),
			predicted_lower: predicted.map(({ lower }: any) => lower),
			predicted_upper: predicted.map(({ upper }: any) => upper)
		};
	},

	glm_cluster(input) {
		const fit = fitPoisson(countData(input));
		if (fit.kind === 'none') return fit;
		const robust = computeClusterRobust(fit, input.cluster);
		const list = (errors: Float64Array | null) => errors && Array.from(errors);
		return {
			coef: list(fit.coefficients),
			model_se: list(fit.standardErrors),
			hc0_se: list(robust.hc0),
			cr0_se: list(robust.cr0),
			cr1_se: list(robust.cr1),
			cr1_stata_se: list(robust.cr1Small),
			clusters: robust.clusters
		};
	},

	negbin_glm(input) {
		const fit = fitNegativeBinomial(countData(input));
		if (fit.kind === 'none') return fit;
		return {
			coef: Array.from(fit.coefficients),
			se: Array.from(fit.standardErrors),
			theta: fit.theta,
			se_theta: fit.thetaStandardError,
			loglik: fit.logLikelihood,
			deviance: fit.deviance,
			aic: fit.aic,
			lr_vs_poisson: fit.likelihoodRatio,
			lr_p_boundary: fit.likelihoodRatioP
		};
	},

	poisson_trend({ count, exposure, score }) {
		const trend = testPoissonTrend(count, exposure, score);
		return {
			U: trend.u,
			V: trend.v,
			z: trend.z,
			p_two_sided: trend.pTwoSided,
			p_greater: trend.pGreater,
			heterogeneity_chi2: trend.heterogeneity.chi2,
			heterogeneity_df: trend.heterogeneity.df,
			heterogeneity_p: trend.heterogeneity.p,
			departure_chi2: trend.departure.chi2,
			departure_p: trend.departure.p
		};
	},

	cochran_armitage({ events, trials, score }) {
		const { z, chi2, pTwoSided } = testProportionTrend(events, trials, score);
		return { z, chi2, p_two_sided: pTwoSided };
	},

	isoreg: ({ y }) => ({ fit: Array.from(fitIsotonic(y)) }),

	isotonic_rates({ count, exposure }) {
		const { raw, fit, expectedTotal } = fitIsotonicRates(count, exposure);
		return { raw, fit, expected_total: expectedTotal };
	},

	wilson({ events, trials, conf = 0.95 }) {
		const exact = computeClopperPearsonInterval(events, trials, conf);
		return {
			...computeWilsonInterval(events, trials, conf),
			clopper_pearson_lower: exact.lower,
			clopper_pearson_upper: exact.upper
		};
	},

	quantile_type7: ({ x, probs }) => ({ q: computeQuantiles(x, probs) }),

	quantile_rank_interval({ n, p, conf = 0.95 }) {
		const { lowerRank, upperRank, coverage } = computeQuantileRanks(n, p, conf);
		return { lower_rank: lowerRank, upper_rank: upperRank, coverage };
	},

	p_adjust({ p }) {
		const BH = adjustBenjaminiHochberg(p);
		return {
			BH,
			BY: adjustBenjaminiYekutieli(p),
			holm: adjustHolm(p),
			bonferroni: adjustBonferroni(p),
			'rejected_BH_0.05': rejectAt(BH, 0.05).filter(Boolean).length
		};
	},

	exposure_needed({ rate_ratio, alpha, power, exposure_ratio_new_to_base, base_rate_per_hour = TABLE_RATES }) {
		const plan = { rateRatio: rate_ratio, alpha, power, exposureRatio: exposure_ratio_new_to_base };
		const needed = computeEventsNeeded(plan);
		const atLog = computeExactPower(needed.logFormula, plan);
		const atSqrt = computeExactPower(needed.sqrtFormula, plan);
		const hours = (events: number | null) =>
			base_rate_per_hour.map((rate: number) => (events === null ? null : computeHours(events, rate)));
		return {
			base_events_log_formula: needed.logFormula,
			base_events_sqrt_formula: needed.sqrtFormula,
			exact_power_central_at_log: atLog.central,
			exact_power_midp_at_log: atLog.midP,
			exact_power_central_at_sqrt: atSqrt.central,
			exact_power_midp_at_sqrt: atSqrt.midP,
			base_events_exact_central: needed.exactCentral,
			base_events_exact_midp: needed.exactMidP,
			base_arm_hours: {
				base_rate_per_hour,
				log_formula: hours(needed.logFormula),
				exact_central: hours(needed.exactCentral)
			}
		};
	},

	exact_power({ base_events, rate_ratio, exposure_ratio_new_to_base, alpha }) {
		const plan = { rateRatio: rate_ratio, alpha, exposureRatio: exposure_ratio_new_to_base };
		const { central, midP } = computeExactPower(base_events, plan);
		return { power_central: central, power_midp: midP };
	}
};
