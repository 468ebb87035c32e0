/** Standard errors that stay right when rows of one robot, or one crowd, resemble each other. */

import { bad } from './check.ts';
import type { PoissonFit } from './glm.ts';
import { diagonalRoots, gram, multiply } from './matrix.ts';

export interface ClusterRobust {
	/** Each row its own cluster */
	readonly hc0: Float64Array;
	/** Clusters as they are */
	readonly cr0: Float64Array;
	/** cr0 with the variance × G/(G − 1), for few clusters; null with one cluster only */
	readonly cr1: Float64Array | null;
	/** cr1 with the variance × (n − 1)/(n − p) as well */
	readonly cr1Small: Float64Array | null;
	readonly clusters: number;
}

/**
 * Cluster-robust standard errors of a Poisson fit, A⁻¹(Σ U_g·U_gᵀ)A⁻¹ with U_g the score of cluster g
 * (Liang & Zeger 1986, Biometrika 73; from memory). Wants a dozen clusters or more; with fewer they are too small.
 *
 * @param labels one per row of the data that was fitted, e.g. the robot
 * @throws Failure 'bad_input' when a row of the fit has no label
 */
export function computeClusterRobust(fit: PoissonFit, labels: ArrayLike<string | number>): ClusterRobust {
	const { n, columns: p, counts, design, source } = fit.rows;
	const groups = new Map<string | number, number>();
	const scores = new Float64Array(n * p);
	const byGroup = new Float64Array(n * p);
	for (let i = 0; i < n; i++) {
		const label = labels[source[i]!];
		if (label === undefined) throw bad(`Row ${source[i]} has no cluster.`);
		const group = groups.get(label) ?? groups.size;
		groups.set(label, group);
		for (let j = 0; j < p; j++) {
			const score = design[i * p + j]! * (counts[i]! - fit.means[i]!);
			scores[i * p + j] = score;
			byGroup[group * p + j] = byGroup[group * p + j]! + score;
		}
	}
	const clusters = groups.size;
	const bread = fit.covariance;
	const errorsOf = (meat: Float64Array) => diagonalRoots(multiply(multiply(bread, meat, p), bread, p), p);
	const cr0 = errorsOf(gram(byGroup, clusters, p));
	const few = clusters > 1 ? Math.sqrt(clusters / (clusters - 1)) : null;
	return {
		hc0: errorsOf(gram(scores, n, p)),
		cr0,
		cr1: few === null ? null : cr0.map((error) => error * few),
		cr1Small: few === null || n <= p ? null : cr0.map((error) => error * few * Math.sqrt((n - 1) / (n - p))),
		clusters
	};
}
