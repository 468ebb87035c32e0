/* eslint-disable @typescript-eslint/no-explicit-any -- reference inputs are plain JSON */
import { Failure } from '../../../src/lib/domain/failure.ts';
import {
	applySimilarity,
	fitSimilarity,
	invertSimilarity,
	rotateHeading,
	transformCovariance
} from '../../../src/lib/domain/geometry/similarity.ts';

function similarity(input: any) {
	try {
		const got = fitSimilarity(input.from, input.to, {
			estimateScale: input.estimate_scale ?? true,
			allowReflection: input.allow_reflection ?? false,
			weights: input.weights ?? null
		});
		return {
			scale: got.scale,
			theta_rad: got.rotation,
			R: got.matrix,
			t: [got.tx, got.ty],
			mirrored: got.mirrored,
			residual_vectors: got.residuals.map(({ x, y }) => [x, y]),
			residuals: got.distances,
			rms: got.rms,
			max_residual: got.maxResidual,
			sigma_hat: got.sigma,
			leave_one_out: got.leaveOneOut
		};
	} catch (cause) {
		if (cause instanceof Failure) return { error: (cause.details as any)?.reason ?? cause.code };
		throw cause;
	}
}

function inverse({ scale, theta_rad, t, points, heading_rad, cov }: any) {
	const there = { scale, rotation: theta_rad, tx: t[0], ty: t[1] };
	const back = invertSimilarity(there);
	const [xx, xy, yy] = transformCovariance(there, [cov[0][0], cov[0][1], cov[1][1]]);
	return {
		mapped: points.map(([x, y]: [number, number]) => {
			const mapped = applySimilarity(there, x, y);
			return [mapped.x, mapped.y];
		}),
		inverse_scale: back.scale,
		inverse_t: [back.tx, back.ty],
		heading_rad: rotateHeading(there, heading_rad),
		cov: [
			[xx, xy],
			[xy, yy]
		]
	};
}

export const handlers: Record<string, (input: any) => unknown> = { similarity, inverse };
