/* eslint-disable @typescript-eslint/no-explicit-any -- reference inputs are plain JSON */
import {
	coverageOfSigmas,
	ellipseOfCovariance,
	ellipseOfSample,
	isInsideEllipse,
	mahalanobisSquared,
	type Ellipse
} from '../../../src/lib/domain/geometry/ellipse.ts';
import type { Covariance } from '../../../src/lib/domain/geometry/similarity.ts';

const covarianceOf = (cov: any): Covariance => [cov[0][0], cov[0][1], cov[1][1]];

const shown = ({ semiMajor, semiMinor, angle, eigenvalues, k2, area }: Ellipse) => ({
	semi_major: semiMajor,
	semi_minor: semiMinor,
	angle_rad: angle,
	eigenvalues,
	k2,
	area
});

function sample_ellipse({ points, p = 0.95 }: any) {
	const got = ellipseOfSample(points, p);
	if (!got) return { n: points.length, defined: false };
	const [xx, xy, yy] = got.covariance;
	return {
		n: got.n,
		defined: true,
		mean: got.mean,
		cov: [
			[xx, xy],
			[xy, yy]
		],
		...shown(got),
		k2_prediction_small_sample: got.smallSample?.predictionK2 ?? null,
		k2_mean_hotelling: got.smallSample?.meanK2 ?? null,
		mean_ellipse_semi_axes: got.smallSample?.meanSemiAxes ?? null
	};
}

const cov_ellipse = ({ cov, p = 0.95 }: any) => shown(ellipseOfCovariance(covarianceOf(cov), p));

const coverage = ({ k }: any) => ({ probability: coverageOfSigmas(k) });

function membership({ cov, mean = [0, 0], points, p = 0.95 }: any) {
	const offsets = points.map(([x, y]: [number, number]) => [x - mean[0], y - mean[1]] as const);
	return {
		d2: offsets.map(([dx, dy]: readonly [number, number]) => mahalanobisSquared(covarianceOf(cov), dx, dy)),
		inside: offsets.map(([dx, dy]: readonly [number, number]) => isInsideEllipse(covarianceOf(cov), dx, dy, p))
	};
}

export const handlers: Record<string, (input: any) => unknown> = { sample_ellipse, cov_ellipse, coverage, membership };
