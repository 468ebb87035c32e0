/** Two clocks, one picture: how late an event is although only its server time is known. Pure. */

/**
 * Keeps the smallest difference between our clock and the server's seen so far: the two clocks' offset plus the fastest
 * delivery. An event that waited on its way is thereby known to be old although it has only just come.
 */
export function leastLag(lag: number | null, receivedAtMs: number, serverTimeMs: number): number {
	const now = receivedAtMs - serverTimeMs;
	return lag === null ? now : Math.min(lag, now);
}
