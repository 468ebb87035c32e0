/** One measured piece of work beside its straightforward form. */
export interface BenchPart {
	readonly name: string;
	readonly ours: () => void;
	/** The same result the plain way, to be measured in the same run. */
	readonly straightforward: () => void;
	/** Wanted median time of one run of `ours` on one core, ms */
	readonly target_ms: number;
}
