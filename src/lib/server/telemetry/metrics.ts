/** Figures about the program itself, in Prometheus text format at /metrics. */

import { collectDefaultMetrics, Counter, Gauge, Histogram, Registry } from 'prom-client';

export interface Metrics {
	readonly registry: Registry;
	/** One answered request; `route` is the route's pattern, never the path, so that the number of series is bounded. */
	countRequest(route: string, method: string, status: number, duration_s: number): void;
	countSlowReader(): void;
	countSignIn(outcome: 'accepted' | 'refused' | 'limited'): void;
}

export interface Gauges {
	/** Open event streams */
	readers(): number;
	messagesPerS(): number;
	rejectedTotal(): number;
}

/** A registry of its own for each App: in development the program starts again without the process doing so. */
export function createMetrics(gauges: Gauges): Metrics {
	const registry = new Registry();
	collectDefaultMetrics({ register: registry });
	const registers = [registry];

	const requests = new Histogram({
		name: 'elbowroom_http_request_duration_seconds',
		help: 'Time to the first byte of an answer; event streams count until they are open.',
		labelNames: ['route', 'method', 'status'],
		buckets: [0.005, 0.02, 0.05, 0.1, 0.25, 0.5, 1, 2.5, 10],
		registers
	});
	const slowReaders = new Counter({
		name: 'elbowroom_live_slow_readers_total',
		help: 'Event streams ended because the reader lagged too far behind.',
		registers
	});
	const signIns = new Counter({
		name: 'elbowroom_sign_ins_total',
		help: 'Attempts to sign in.',
		labelNames: ['outcome'],
		registers
	});
	const gauge = (name: string, help: string, read: () => number) =>
		new Gauge({
			name,
			help,
			registers,
			collect() {
				this.set(read());
			}
		});
	gauge('elbowroom_live_readers', 'Open event streams.', gauges.readers);
	gauge('elbowroom_messages_per_second', 'Robot messages accepted per second.', gauges.messagesPerS);
	gauge('elbowroom_rejected_messages', 'Robot messages not used since the start.', gauges.rejectedTotal);

	return {
		registry,
		countRequest: (route, method, status, duration_s) =>
			requests.observe({ route, method, status: String(status) }, duration_s),
		countSlowReader: () => slowReaders.inc(),
		countSignIn: (outcome) => signIns.inc({ outcome })
	};
}
