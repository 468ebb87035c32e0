/** The last seconds of one floor's stream, so that a reader whose line broke for a moment misses nothing. */

import type { LiveEvent } from '../../contracts/live.ts';

/** ms and number of events kept; chosen by us: a reader away for longer gets a snapshot, which is smaller by then. */
const KEPT_MS = 10_000;
const KEPT_EVENTS = 96;

const encoder = new TextEncoder();

/** One event as it goes over the line. Made into bytes once, on first use, however many readers there are. */
export interface SentEvent {
	readonly id: string;
	readonly event: LiveEvent['event'];
	readonly bytes: Uint8Array;
}

export function sentEvent(id: string, { event, data }: LiveEvent): SentEvent {
	let bytes: Uint8Array | undefined;
	return {
		id,
		event,
		get bytes() {
			return (bytes ??= encoder.encode(`event: ${event}\nid: ${id}\ndata: ${JSON.stringify(data)}\n\n`));
		}
	};
}

/** Events in order with ids `<boot>-<n>`, n counting up from 1. */
export class EventLog {
	readonly #boot: string;
	#events: { readonly n: number; readonly atMs: number; readonly sent: SentEvent }[] = [];
	#last = 0;

	/** @param boot differs from start to start, so that an id of an earlier run is recognised as foreign */
	constructor(boot: string) {
		this.#boot = boot;
	}

	/** Id of the newest event; a reader who has it has everything. */
	get lastId(): string {
		return `${this.#boot}-${this.#last}`;
	}

	append(event: LiveEvent, nowMs: number): SentEvent {
		const n = ++this.#last;
		const sent = sentEvent(`${this.#boot}-${n}`, event);
		this.#events.push({ n, atMs: nowMs, sent });
		const oldest = this.#events.findIndex(({ atMs }) => nowMs - atMs < KEPT_MS);
		const drop = Math.max(oldest, this.#events.length - KEPT_EVENTS);
		if (drop > 0) this.#events.splice(0, drop);
		return sent;
	}

	/** The events after `id`, or null when they are not known to be complete: foreign, too old, or no id at all. */
	since(id: string | null): SentEvent[] | null {
		const match = id === null ? null : /^([a-z0-9]+)-([0-9]{1,15})$/.exec(id);
		if (match === null || match[1] !== this.#boot) return null;
		const n = Number(match[2]);
		const first = this.#events[0]?.n ?? this.#last + 1;
		if (n > this.#last || n < first - 1) return null;
		return this.#events.filter((event) => event.n > n).map(({ sent }) => sent);
	}
}
