/**
 * Where a walking person is and will be: a Kalman filter with constant velocity, state [x, y, vx, vy].
 *
 * Model and update after Bar-Shalom, Li & Kirubarajan (2001), Estimation with Applications to Tracking and Navigation
 * (from memory). Covariances are 4×4, row by row, in one Float64Array of 16. Nothing here changes its arguments.
 */

export interface KalmanState {
	/** m */
	readonly x: number;
	readonly y: number;
	/** m/s */
	readonly vx: number;
	readonly vy: number;
	/** 4×4 of [x, y, vx, vy], row by row; m², m²/s, m²/s² */
	readonly covariance: Float64Array;
}

/** `continuous`: white-noise acceleration of density q, m²/s³. `discrete`: acceleration of deviation q, m/s², constant in a step. */
export type NoiseModel = 'continuous' | 'discrete';

/** Symmetric 2×2 covariance, m². */
export interface Covariance2 {
	readonly xx: number;
	readonly xy: number;
	readonly yy: number;
}

export interface KalmanUpdate {
	readonly state: KalmanState;
	/** Measured minus predicted position, m */
	readonly innovation: readonly [x: number, y: number];
	/** S = H P Hᵀ + R */
	readonly innovationCovariance: Covariance2;
	/** 4×2, row by row: how much of the innovation each part of the state takes */
	readonly gain: Float64Array;
	/** Normalised innovation squared, χ² with 2 degrees of freedom when the model is right */
	readonly nis: number;
	/** Natural logarithm of the density of this measurement before it was used */
	readonly logLikelihood: number;
}

/**
 * Process noise of one axis over `dt` seconds: variance of position, covariance with velocity, variance of velocity.
 *
 * Only the continuous model gives two half steps the noise of one whole step, so it is the one for uneven timing:
 * Q = q [[dt³/3, dt²/2], [dt²/2, dt]]. The discrete one is q² [[dt⁴/4, dt³/2], [dt³/2, dt²]].
 */
export function processNoise(
	dt: number,
	q: number,
	model: NoiseModel = 'continuous'
): { position: number; cross: number; velocity: number } {
	const dt2 = dt * dt;
	if (model === 'continuous') return { position: (q * dt2 * dt) / 3, cross: (q * dt2) / 2, velocity: q * dt };
	const q2 = q * q;
	return { position: (q2 * dt2 * dt2) / 4, cross: (q2 * dt2 * dt) / 2, velocity: q2 * dt2 };
}

/** State `dt` seconds (≥ 0) later when nothing is measured: x⁻ = F x, P⁻ = F P Fᵀ + Q. */
export function predict(state: KalmanState, dt: number, q: number, model: NoiseModel = 'continuous'): KalmanState {
	const { position, cross, velocity } = processNoise(dt, q, model);
	const covariance = transport(state.covariance, dt, 1);
	for (let axis = 0; axis < 2; axis += 1) {
		covariance[axis * 5]! += position;
		covariance[axis * 5 + 2]! += cross;
		covariance[axis * 5 + 8]! += cross;
		covariance[axis * 5 + 10]! += velocity;
	}
	return { x: state.x + dt * state.vx, y: state.y + dt * state.vy, vx: state.vx, vy: state.vy, covariance };
}

/** F P Fᵀ with F = [[1, reach], [0, keep]] per axis: `reach` seconds of motion, `keep` the share of velocity left. */
export function transport(covariance: Float64Array, reach: number, keep: number): Float64Array {
	const p = covariance;
	const out = new Float64Array(16);
	for (let i = 0; i < 2; i += 1) {
		for (let j = 0; j < 2; j += 1) {
			const xx = p[i * 4 + j]!;
			const xv = p[i * 4 + j + 2]!;
			const vx = p[(i + 2) * 4 + j]!;
			const vv = p[(i + 2) * 4 + j + 2]!;
			out[i * 4 + j] = xx + reach * (xv + vx) + reach * reach * vv;
			out[i * 4 + j + 2] = keep * (xv + reach * vv);
			out[(i + 2) * 4 + j] = keep * (vx + reach * vv);
			out[(i + 2) * 4 + j + 2] = keep * keep * vv;
		}
	}
	return out;
}

/**
 * State after a position (zx, zy) was measured with covariance `r`, and what the measurement said about the prediction.
 * The Joseph form (I − KH) P (I − KH)ᵀ + K R Kᵀ keeps the covariance symmetric and positive under rounding.
 */
export function update(state: KalmanState, zx: number, zy: number, r: Covariance2): KalmanUpdate {
	const p = state.covariance;
	const innovationX = zx - state.x;
	const innovationY = zy - state.y;
	const sxx = p[0]! + r.xx;
	const sxy = p[1]! + r.xy;
	const syy = p[5]! + r.yy;
	const determinant = sxx * syy - sxy * sxy;
	const gain = new Float64Array(8);
	for (let row = 0; row < 4; row += 1) {
		const a = p[row * 4]!;
		const b = p[row * 4 + 1]!;
		gain[row * 2] = (a * syy - b * sxy) / determinant;
		gain[row * 2 + 1] = (b * sxx - a * sxy) / determinant;
	}
	const nis =
		(innovationX * innovationX * syy - 2 * innovationX * innovationY * sxy + innovationY * innovationY * sxx) /
		determinant;
	return {
		state: {
			x: state.x + gain[0]! * innovationX + gain[1]! * innovationY,
			y: state.y + gain[2]! * innovationX + gain[3]! * innovationY,
			vx: state.vx + gain[4]! * innovationX + gain[5]! * innovationY,
			vy: state.vy + gain[6]! * innovationX + gain[7]! * innovationY,
			covariance: joseph(p, gain, r)
		},
		innovation: [innovationX, innovationY],
		innovationCovariance: { xx: sxx, xy: sxy, yy: syy },
		gain,
		nis,
		logLikelihood: -0.5 * (nis + Math.log(4 * Math.PI * Math.PI * determinant))
	};
}

function joseph(p: Float64Array, gain: Float64Array, r: Covariance2): Float64Array {
	// H picks x and y, so (I − KH) P subtracts gain × the first two rows of P, and likewise by columns on the right.
	const left = new Float64Array(16);
	for (let i = 0; i < 4; i += 1) {
		for (let j = 0; j < 4; j += 1) {
			left[i * 4 + j] = p[i * 4 + j]! - gain[i * 2]! * p[j]! - gain[i * 2 + 1]! * p[4 + j]!;
		}
	}
	const out = new Float64Array(16);
	for (let i = 0; i < 4; i += 1) {
		const noiseX = gain[i * 2]! * r.xx + gain[i * 2 + 1]! * r.xy;
		const noiseY = gain[i * 2]! * r.xy + gain[i * 2 + 1]! * r.yy;
		for (let j = 0; j < 4; j += 1) {
			const gx = gain[j * 2]!;
			const gy = gain[j * 2 + 1]!;
			out[i * 4 + j] = left[i * 4 + j]! - left[i * 4]! * gx - left[i * 4 + 1]! * gy + noiseX * gx + noiseY * gy;
		}
	}
	return out;
}

/** 4×4 covariance with the given variances of x, y, vx, vy and nothing between them. */
export function diagonalCovariance(variances: readonly [number, number, number, number]): Float64Array {
	const out = new Float64Array(16);
	variances.forEach((variance, index) => (out[index * 5] = variance));
	return out;
}
