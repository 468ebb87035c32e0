/** Owen's T function, to about 1e-14 absolute. */

/**
 * T(h, a) = 1/(2π)·∫₀ᵃ exp(−h²(1 + x²)/2)/(1 + x²) dx; odd in a, even in h, finite for infinite arguments.
 *
 * Source: Owen 1956, *Tables for computing bivariate normal probabilities*, Ann. Math. Stat. 27 (from memory).
 * For |a| > 1 his relation T(h, a) + T(ah, 1/a) = (Φ(h) + Φ(ah))/2 − Φ(h)·Φ(ah) brings the argument below 1, where
 * the integrand is smooth enough for one Gauss–Legendre rule.
 */
export function owensT(h: number, a: number): number {
	if (a < 0) return -owensT(h, -a);
	const k = Math.abs(h);
	if (a <= 1) return smooth(k, a);
	// With Q = 1 − Φ the relation's right side is (Q(h) + Q(ah))/2 − Q(h)·Q(ah), free of cancellation.
	const near = upperTail(k);
	const far = upperTail(a * k);
	return (near + far) / 2 - near * far - smooth(a * k, 1 / a);
}

function smooth(h: number, a: number): number {
	const half = (h * h) / 2;
	// Beyond, the whole function is below 1e-17.
	if (half > 39) return 0;
	let sum = 0;
	for (const [node, weight] of RULE) {
		const square = (a * node) ** 2;
		sum += (weight * Math.exp(-half * (1 + square))) / (1 + square);
	}
	return (a * sum) / (2 * Math.PI);
}

/** 1 − Φ(h) for h ≥ 0, from erf(x) = 2/√π·exp(−x²)·Σ 2ⁿx²ⁿ⁺¹/(2n + 1)!!, whose terms are all positive. */
function upperTail(h: number): number {
	const x = h / Math.SQRT2;
	if (x > 6) return 0;
	let term = x;
	let sum = x;
	for (let n = 1; term > 1e-17 * sum; n++) {
		term *= (2 * x * x) / (2 * n + 1);
		sum += term;
	}
	return 0.5 - (Math.exp(-x * x) * sum) / Math.sqrt(Math.PI);
}

/** Gauss–Legendre on [0, 1]; 24 points hold the integrand to 1e-15 for every h that matters. */
const RULE = gaussLegendre(24);

/** Nodes are roots of the Legendre polynomial, found by Newton's method from the usual cosine start. */
function gaussLegendre(size: number): readonly (readonly [node: number, weight: number])[] {
	return Array.from({ length: size }, (_, i) => {
		let x = Math.cos((Math.PI * (i + 0.75)) / (size + 0.5));
		let slope = 1;
		for (let round = 0; round < 8; round++) {
			let [before, value] = [1, x];
			for (let k = 2; k <= size; k++) [before, value] = [value, ((2 * k - 1) * x * value - (k - 1) * before) / k];
			slope = (size * (x * value - before)) / (x * x - 1);
			x -= value / slope;
		}
		return [(1 + x) / 2, 1 / ((1 - x * x) * slope * slope)] as const;
	});
}
