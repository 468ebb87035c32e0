/** Limits how often something may be tried. */

/** Most keys remembered; the oldest give way, so that a flood of invented keys cannot fill the memory. */
const MOST_KEYS = 20_000;

export interface RateLimit {
	/** Counts one try; 0 when it is allowed, else the ms to wait. A refused try does not make the wait longer. */
	take(key: string, nowMs: number): number;
	/** Forgets the tries of `key`. */
	reset(key: string): void;
	/** Keys remembered */
	readonly size: number;
}

/** At most `limit` tries in `windowMs`, counted from the first of them. Both must be positive. */
export function createRateLimit(limit: number, windowMs: number): RateLimit {
	// Insertion order is order of expiry, because every window is equally long.
	const windows = new Map<string, { count: number; endsAtMs: number }>();

	const dropExpired = (nowMs: number) => {
		for (const [key, { endsAtMs }] of windows) {
			if (endsAtMs > nowMs && windows.size <= MOST_KEYS) return;
			windows.delete(key);
		}
	};

	return {
		take(key, nowMs) {
			dropExpired(nowMs);
			const open = windows.get(key);
			if (open === undefined) {
				windows.set(key, { count: 1, endsAtMs: nowMs + windowMs });
				return 0;
			}
			if (open.count >= limit) return open.endsAtMs - nowMs;
			open.count++;
			return 0;
		},
		reset: (key) => void windows.delete(key),
		get size() {
			return windows.size;
		}
	};
}
