/** The little linear algebra that regression needs. Matrices are flat, row by row; the caller's arrays are kept unless said. */

/** A column left shorter than this share of itself by the columns before it depends on them; chosen by us, as common fits do. */
const DEPENDENT = 1e-10;

export interface Orthonormal {
	/** n × p, orthonormal columns spanning the same space */
	readonly q: Float64Array;
	/** p × p upper triangle with design = q·r */
	readonly r: Float64Array;
}

/**
 * Splits an n × p matrix into orthonormal columns and a triangle (Gram–Schmidt, each column swept twice for full accuracy),
 * so that a fit does not care how the columns are scaled or centred. Null when the columns depend on each other.
 */
export function orthonormalise(matrix: Float64Array, n: number, p: number): Orthonormal | null {
	if (n < p) return null;
	const q = matrix.slice();
	const r = new Float64Array(p * p);
	for (let j = 0; j < p; j++) {
		const before = columnNorm(q, n, p, j);
		for (let sweep = 0; sweep < 2; sweep++) {
			for (let k = 0; k < j; k++) {
				let dot = 0;
				for (let i = 0; i < n * p; i += p) dot += q[i + k]! * q[i + j]!;
				for (let i = 0; i < n * p; i += p) q[i + j] = q[i + j]! - dot * q[i + k]!;
				r[k * p + j] = r[k * p + j]! + dot;
			}
		}
		const after = columnNorm(q, n, p, j);
		if (!(after > before * DEPENDENT)) return null;
		r[j * p + j] = after;
		for (let i = 0; i < n * p; i += p) q[i + j] = q[i + j]! / after;
	}
	return { q, r };
}

function columnNorm(matrix: Float64Array, n: number, p: number, column: number): number {
	let sum = 0;
	for (let i = column; i < n * p; i += p) sum += matrix[i]! * matrix[i]!;
	return Math.sqrt(sum);
}

/** Lower Cholesky factor of a symmetric p × p matrix, or null when it is not positive definite. */
export function cholesky(matrix: Float64Array, p: number): Float64Array | null {
	const lower = new Float64Array(p * p);
	for (let i = 0; i < p; i++) {
		for (let j = 0; j <= i; j++) {
			let sum = matrix[i * p + j]!;
			for (let k = 0; k < j; k++) sum -= lower[i * p + k]! * lower[j * p + k]!;
			if (i > j) lower[i * p + j] = sum / lower[j * p + j]!;
			else if (sum > 0) lower[i * p + i] = Math.sqrt(sum);
			else return null;
		}
	}
	return lower;
}

/** Solves (L·Lᵀ)·x = b; overwrites `b` with x. */
export function solveCholesky(lower: Float64Array, p: number, b: Float64Array): Float64Array {
	for (let i = 0; i < p; i++) {
		let sum = b[i]!;
		for (let k = 0; k < i; k++) sum -= lower[i * p + k]! * b[k]!;
		b[i] = sum / lower[i * p + i]!;
	}
	for (let i = p - 1; i >= 0; i--) {
		let sum = b[i]!;
		for (let k = i + 1; k < p; k++) sum -= lower[k * p + i]! * b[k]!;
		b[i] = sum / lower[i * p + i]!;
	}
	return b;
}

/** Solves R·x = b for an upper triangle; overwrites `b` with x. */
export function solveUpper(r: Float64Array, p: number, b: Float64Array): Float64Array {
	for (let i = p - 1; i >= 0; i--) {
		let sum = b[i]!;
		for (let k = i + 1; k < p; k++) sum -= r[i * p + k]! * b[k]!;
		b[i] = sum / r[i * p + i]!;
	}
	return b;
}

/** R⁻¹·(L·Lᵀ)⁻¹·R⁻ᵀ: the inverse of Rᵀ·(L·Lᵀ)·R, p × p and symmetric. */
export function sandwichInverse(lower: Float64Array, r: Float64Array, p: number): Float64Array {
	// Columns of G = L⁻¹·R⁻ᵀ, so that the answer is Gᵀ·G.
	const g = new Float64Array(p * p);
	for (let column = 0; column < p; column++) {
		const x = new Float64Array(p);
		x[column] = 1;
		for (let i = 0; i < p; i++) {
			for (let k = 0; k < i; k++) x[i] = x[i]! - r[k * p + i]! * x[k]!;
			x[i] = x[i]! / r[i * p + i]!;
		}
		for (let i = 0; i < p; i++) {
			for (let k = 0; k < i; k++) x[i] = x[i]! - lower[i * p + k]! * x[k]!;
			x[i] = x[i]! / lower[i * p + i]!;
			g[i * p + column] = x[i]!;
		}
	}
	return gram(g, p, p);
}

/** MᵀM of an n × p matrix. */
export function gram(matrix: Float64Array, n: number, p: number): Float64Array {
	const product = new Float64Array(p * p);
	for (let i = 0; i < n; i++) {
		for (let a = 0; a < p; a++) {
			for (let b = 0; b <= a; b++) product[a * p + b] = product[a * p + b]! + matrix[i * p + a]! * matrix[i * p + b]!;
		}
	}
	return mirror(product, p);
}

/** A·B for p × p matrices. */
export function multiply(a: Float64Array, b: Float64Array, p: number): Float64Array {
	const product = new Float64Array(p * p);
	for (let i = 0; i < p; i++) {
		for (let j = 0; j < p; j++) {
			let sum = 0;
			for (let k = 0; k < p; k++) sum += a[i * p + k]! * b[k * p + j]!;
			product[i * p + j] = sum;
		}
	}
	return product;
}

/** Copies the lower triangle onto the upper one; changes and returns its argument. */
function mirror(matrix: Float64Array, p: number): Float64Array {
	for (let i = 0; i < p; i++) for (let j = 0; j < i; j++) matrix[j * p + i] = matrix[i * p + j]!;
	return matrix;
}

/** Roots of the diagonal: standard errors of a covariance. */
export function diagonalRoots(matrix: Float64Array, p: number): Float64Array {
	return Float64Array.from({ length: p }, (_, j) => Math.sqrt(matrix[j * p + j]!));
}
