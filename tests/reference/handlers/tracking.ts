/* eslint-disable @typescript-eslint/no-explicit-any -- reference cases are plain JSON */
/** Reference kinds of prediction, gating, assignment and tracking quality. */

import {
	computeGreedyTotal,
	isOnlyMostPairs,
	isOnlyWithinGate
} from '../../../src/lib/domain/tracking/assignment-checks.ts';
import { assignMostPairs, assignWithinGate } from '../../../src/lib/domain/tracking/assignment.ts';
import { fuseReports, type PositionEstimate } from '../../../src/lib/domain/tracking/fusion.ts';
import { chiSquareGate, mahalanobisSquared } from '../../../src/lib/domain/tracking/gating.ts';
import {
	diagonalCovariance,
	predict,
	processNoise,
	update,
	type Covariance2,
	type KalmanState
} from '../../../src/lib/domain/tracking/kalman.ts';
import { computeTrackingQuality } from '../../../src/lib/domain/tracking/mot.ts';
import { computeOspa } from '../../../src/lib/domain/tracking/ospa.ts';

const axis = (p: Float64Array) => [p[0], p[2], p[10]];
const mean = ({ x, y, vx, vy }: KalmanState) => [x, y, vx, vy];
const noiseAxis = (dt: number, q: number, model: any) => {
	const { position, cross, velocity } = processNoise(dt, q, model);
	return [position, cross, velocity];
};
const covariance = ([[xx, xy], [, yy]]: any): Covariance2 => ({ xx, xy, yy });
const matrix = ({ xx, xy, yy }: Covariance2) => [
	[xx, xy],
	[xy, yy]
];
const point = ([x, y]: any) => ({ x, y });
const costs = (rows: any): number[][] => rows.map((row: any) => row.map(Number));
const count = <T>(items: readonly T[], test: (item: T) => boolean) => items.filter(test).length;

function kalman({ times, measurements, r_m, q, model, x0, P0_diag, predict_ahead_s }: any) {
	let state: KalmanState = { x: x0[0], y: x0[1], vx: x0[2], vy: x0[3], covariance: diagonalCovariance(P0_diag) };
	let logLikelihood = 0;
	const r = { xx: r_m * r_m, xy: 0, yy: r_m * r_m };
	const steps: unknown[] = [];
	for (let k = 1; k < times.length; k += 1) {
		const before = predict(state, times[k] - times[k - 1], q, model);
		const step = { t: times[k], x_pred: mean(before), P_pred_axis: axis(before.covariance) };
		const measured = measurements[k];
		if (!measured) {
			state = before;
			steps.push({ ...step, nis: null, x: mean(state), P_axis: axis(state.covariance) });
			continue;
		}
		const after = update(before, measured[0], measured[1], r);
		state = after.state;
		logLikelihood += after.logLikelihood;
		steps.push({
			...step,
			nis: after.nis,
			x: mean(state),
			P_axis: axis(state.covariance),
			innovation: after.innovation,
			S_diag: [after.innovationCovariance.xx, after.innovationCovariance.yy],
			K_axis: [after.gain[0], after.gain[4]]
		});
	}
	const predictions = (predict_ahead_s ?? []).map((ahead: number) => {
		const later = predict(state, ahead, q, model);
		return { ahead_s: ahead, x: mean(later), P_axis: axis(later.covariance) };
	});
	return { steps, log_likelihood: logLikelihood, predictions };
}

function noiseOfSteps(dt: number, parts: number, model: any) {
	let state: KalmanState = { x: 0, y: 0, vx: 0, vy: 0, covariance: new Float64Array(16) };
	for (let k = 0; k < parts; k += 1) state = predict(state, dt / parts, 1, model);
	return axis(state.covariance);
}

function gated({ cost, gate }: any) {
	const table = costs(cost);
	const limit = Number(gate);
	const most = assignMostPairs(table, limit);
	const best = assignWithinGate(table, limit);
	const unused = (size: number, side: 0 | 1) =>
		Array.from({ length: size }, (_, i) => i).filter((i) => !best.pairs.some((pair) => pair[side] === i));
	return {
		most_pairs: { total: most.total, pairs: most.pairs, pairs_unique: isOnlyMostPairs(table, most, limit) },
		total_with_miss_costs: best.total,
		pairs: best.pairs,
		pairs_unique: isOnlyWithinGate(table, best, limit),
		unmatched_rows: unused(table.length, 0),
		unmatched_cols: unused(table[0]?.length ?? 0, 1)
	};
}

function fusion({ robot_a, robot_b, gate }: any) {
	const read = (reports: any): PositionEstimate[] =>
		reports.map(({ mean, cov }: any) => ({ ...point(mean), covariance: covariance(cov) }));
	const [a, b] = [read(robot_a), read(robot_b)];
	const { distances, pairs, fused, persons } = fuseReports(a, b, Number(gate));
	return {
		d2: distances,
		pairs,
		people_counted_once: persons,
		naive_sum: a.length + b.length,
		'matches_with_fixed_0.5_m_radius': count(b, (q) => a.some((p) => Math.hypot(p.x - q.x, p.y - q.y) < 0.5)),
		fused: fused.map((one, k) => ({ pair: pairs[k], mean: [one.x, one.y], cov: matrix(one.covariance) }))
	};
}

function quality({ frames, gate_m }: any) {
	const read = (points: any) => new Map(Object.entries(points ?? {}).map(([id, at]) => [id, point(at)] as const));
	const result = computeTrackingQuality(
		frames.map(({ gt, hyp }: any) => ({ truth: read(gt), tracks: read(hyp) })),
		gate_m
	);
	return {
		per_frame: result.frames.map(({ matches, misses, falseTracks, switches }) => ({
			matches,
			fn: misses,
			fp: falseTracks,
			switches
		})),
		fn: result.misses,
		fp: result.falseTracks,
		id_switches: result.switches,
		gt: result.truths,
		mota: result.mota,
		motp_m: result.motp,
		idtp: result.identityTrue,
		idfp: result.identityFalse,
		idfn: result.identityMissed,
		idf1: result.idf1,
		idp: result.identityPrecision,
		idr: result.identityRecall
	};
}

export const handlers: Record<string, (input: any) => unknown> = {
	kalman_cv: kalman,
	process_noise: ({ dt, q, model }) => ({ Q_axis: noiseAxis(dt, q, model) }),
	process_noise_split: ({ dt, halves }) => ({
		continuous_one_step_axis: noiseAxis(dt, 1, 'continuous'),
		continuous_two_half_steps_axis: noiseOfSteps(dt, halves ?? 2, 'continuous'),
		discrete_one_step_axis: noiseAxis(dt, 1, 'discrete'),
		discrete_two_half_steps_axis: noiseOfSteps(dt, halves ?? 2, 'discrete')
	}),
	chi2_gate: ({ dof, p }) => ({ gate: chiSquareGate(p, dof) }),
	mahalanobis: ({ innovation, S }) => {
		const d2 = mahalanobisSquared(innovation[0], innovation[1], covariance(S));
		return { d2, 'inside_0.95': d2 <= chiSquareGate(0.95, 2), 'inside_0.99': d2 <= chiSquareGate(0.99, 2) };
	},
	assignment: ({ cost }) => {
		const table = costs(cost);
		const best = assignMostPairs(table);
		return { ...best, pairs_unique: isOnlyMostPairs(table, best), greedy_total: computeGreedyTotal(table) };
	},
	assignment_gated: gated,
	cross_robot_fusion: fusion,
	ospa: ({ X, Y, c, p }) => {
		const { distance, localisation, cardinality } = computeOspa(X.map(point), Y.map(point), c, p);
		return { ospa: distance, localisation, cardinality };
	},
	mot: quality
};
