/** Where a function crosses zero. */

const MOST_STEPS = 200;

/**
 * The point between `low` and `high` where `f` crosses zero, by the method of Ridders (1979, IEEE Trans. Circuits Syst. 26,
 * three points and an exponential between them), which never leaves the bracket; good to the last few bits.
 *
 * `f` must be continuous and differ in sign at the ends. If it does not, the end nearer to zero is the answer: a tail
 * probability that underflows at one end still gives the honest limit.
 */
export function findRoot(f: (x: number) => number, low: number, high: number): number {
	let fLow = f(low);
	let fHigh = f(high);
	if (fLow === 0) return low;
	if (fHigh === 0) return high;
	if (fLow > 0 === fHigh > 0) return Math.abs(fLow) < Math.abs(fHigh) ? low : high;

	for (let step = 0; step < MOST_STEPS; step++) {
		const middle = low + (high - low) / 2;
		if (middle === low || middle === high) break;
		const fMiddle = f(middle);
		if (fMiddle === 0) return middle;
		const shift = ((middle - low) * Math.sign(fLow - fHigh) * fMiddle) / Math.sqrt(fMiddle * fMiddle - fLow * fHigh);
		const guess = Math.min(high, Math.max(low, Number.isFinite(shift) ? middle + shift : middle));
		const fGuess = f(guess);
		if (fGuess === 0) return guess;

		// The new bracket is the tightest pair of neighbours among the four points that differ in sign.
		const [a, fa, b, fb] = guess < middle ? [guess, fGuess, middle, fMiddle] : [middle, fMiddle, guess, fGuess];
		const before = high - low;
		if (fLow > 0 !== fa > 0) [high, fHigh] = [a, fa];
		else if (fa > 0 !== fb > 0) [low, fLow, high, fHigh] = [a, fa, b, fb];
		else [low, fLow] = [b, fb];
		if (high - low <= 4 * Number.EPSILON * Math.max(Math.abs(low), Math.abs(high)) || high - low === before) break;
	}
	return low + (high - low) / 2;
}

/**
 * The first of start + width, start + 2·width, start + 4·width … at which `f` is no longer positive, or null when none is
 * before the numbers run out or `f` is NaN. A negative width searches downwards.
 */
export function searchOutward(f: (x: number) => number, start: number, width: number): number | null {
	for (let reach = width; Number.isFinite(start + reach); reach *= 2) {
		const value = f(start + reach);
		if (value <= 0) return start + reach;
		if (Number.isNaN(value)) return null;
	}
	return null;
}
