/** Seeded randomness: the same seed and label always give the same numbers, whatever else the simulation draws. */

export interface Random {
	/** Uniform in [0, 1). */
	next(): number;
	/** Uniform in [low, high). */
	between(low: number, high: number): number;
	/** Integer in [0, below); below must be ≥ 1. */
	int(below: number): number;
	/** True with probability p. */
	chance(p: number): boolean;
	/** Normal with the given mean and standard deviation. */
	normal(mean: number, sd: number): number;
	/** Exponential with the given mean. */
	exponential(mean: number): number;
	/** Poisson with the given mean (≥ 0), by multiplication; splits large means. */
	poisson(mean: number): number;
	/** One of the items; the list must not be empty. */
	pick<T>(items: readonly T[]): T;
	/** Index drawn in proportion to the weights; −1 when all are zero. */
	weighted(weights: readonly number[]): number;
	/** An independent stream: its numbers do not depend on how many this one has given. */
	fork(label: string): Random;
}

/**
 * Small fast counter generator sfc32 by Chris Doty-Humphrey (PractRand, public domain; from memory), 128 bits of state,
 * seeded by FNV-1a hashes of seed and label.
 */
export function createRandom(seed: number | string): Random {
	const name = String(seed);
	let a = hash(`${name}/a`);
	let b = hash(`${name}/b`);
	let c = hash(`${name}/c`);
	let counter = 1;

	function next(): number {
		const sum = (a + b + counter) | 0;
		counter = (counter + 1) | 0;
		a = b ^ (b >>> 9);
		b = (c + (c << 3)) | 0;
		c = ((c << 21) | (c >>> 11)) + sum;
		return (sum >>> 0) / 4294967296;
	}
	for (let i = 0; i < 15; i++) next();

	const random: Random = {
		next,
		between: (low, high) => low + (high - low) * next(),
		int: (below) => Math.floor(next() * below),
		chance: (p) => next() < p,
		normal: (mean, sd) => mean + sd * Math.sqrt(-2 * Math.log(1 - next())) * Math.cos(2 * Math.PI * next()),
		exponential: (mean) => -mean * Math.log(1 - next()),
		poisson: (mean) => {
			let rest = mean;
			let total = 0;
			while (rest > 20) {
				total += poissonSmall(20);
				rest -= 20;
			}
			return total + poissonSmall(rest);
		},
		pick: (items) => items[Math.floor(next() * items.length)]!,
		weighted: (weights) => {
			let total = 0;
			for (const weight of weights) total += weight;
			if (!(total > 0)) return -1;
			let left = next() * total;
			for (let i = 0; i < weights.length; i++) {
				left -= weights[i]!;
				if (left < 0) return i;
			}
			return weights.findLastIndex((weight) => weight > 0);
		},
		fork: (label) => createRandom(`${name}>${label}`)
	};

	function poissonSmall(mean: number): number {
		const limit = Math.exp(-mean);
		let count = 0;
		for (let product = next(); product > limit; product *= next()) count++;
		return count;
	}
	return random;
}

function hash(text: string): number {
	let h = 0x811c9dc5;
	for (let i = 0; i < text.length; i++) h = Math.imul(h ^ text.charCodeAt(i), 0x01000193);
	return h;
}
