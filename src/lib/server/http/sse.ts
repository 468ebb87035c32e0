/** An event stream to one reader (text/event-stream, WHATWG HTML). */

import type { LiveHub } from '../live/hub.ts';

/** Events a reader may lag behind before it is cut off. More than a replay holds, about 15 s of a busy floor. */
const QUEUE_LIMIT = 128;
/** Proxies close lines that are silent for longer; common practice. */
const KEEP_ALIVE_MS = 15_000;
/** How long a signed-out person's stream may go on. */
const RECHECK_MS = 60_000;

const encoder = new TextEncoder();
const COMMENT = encoder.encode(':\n\n');

export interface LiveStreamParts {
	readonly hub: LiveHub;
	readonly floor: string;
	/** What the browser heard last before its line broke; null at first. */
	readonly lastEventId: string | null;
	/** Of the request: aborts when the browser leaves. */
	readonly signal: AbortSignal;
	/** Whether the reader may still listen; an error counts as yes. */
	readonly mayListen: () => Promise<boolean>;
	readonly onSlowReader?: () => void;
}

/**
 * One live stream. A reader that lags too far is cut off: its browser connects again by itself and starts with a fresh
 * snapshot, and meanwhile nobody else waits for it.
 */
export function liveResponse(parts: LiveStreamParts): Response {
	const { hub, floor, lastEventId, signal, mayListen, onSlowReader } = parts;
	let end = () => {};

	const body = new ReadableStream<Uint8Array>(
		{
			start(controller) {
				let open = true;
				const put = (bytes: Uint8Array) => {
					if (!open) return;
					if ((controller.desiredSize ?? 0) > 0) return controller.enqueue(bytes);
					onSlowReader?.();
					// An error, not an end: what is still queued is dropped, and the browser connects again.
					controller.error(new Error('The reader is too slow.'));
					end();
				};
				const recheck = async () => {
					if (!(await mayListen().catch(() => true))) end();
				};
				const keepAlive = setInterval(() => put(COMMENT), KEEP_ALIVE_MS);
				const checks = setInterval(() => void recheck(), RECHECK_MS);
				let unsubscribe = () => {};

				end = () => {
					if (!open) return;
					open = false;
					clearInterval(keepAlive);
					clearInterval(checks);
					signal.removeEventListener('abort', end);
					unsubscribe();
					try {
						controller.close();
					} catch {
						// Cancelled by the reader or cut off, so closed already.
					}
				};

				signal.addEventListener('abort', end);
				if (signal.aborted) return end();
				// Spread out, so that after a restart not all browsers come back in the same moment.
				put(encoder.encode(`retry: ${Math.round(1000 + Math.random() * 1500)}\n\n`));
				unsubscribe = hub.subscribe(floor, { next: ({ bytes }) => put(bytes), close: () => end() }, lastEventId);
				// Cut off or closed while still subscribing.
				if (!open) unsubscribe();
			},
			cancel: () => end()
		},
		{ highWaterMark: QUEUE_LIMIT }
	);
	return new Response(body, {
		headers: { 'content-type': 'text/event-stream', 'cache-control': 'no-store', 'x-accel-buffering': 'no' }
	});
}
