/** The live stream: what readers hear, what they hear again, and when they are cut off. */

import { setResponse } from '@sveltejs/kit/node';
import { once } from 'node:events';
import { createServer, type Server } from 'node:http';
import { connect, type AddressInfo } from 'node:net';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import type { LiveAlarm, LiveDelta, LiveEvent, LiveField, LiveHealth } from '../../src/lib/contracts/live.ts';
import { liveResponse, type LiveStreamParts } from '../../src/lib/server/http/sse.ts';
import type { SentEvent } from '../../src/lib/server/live/event-log.ts';
import { createHub, type LiveHub } from '../../src/lib/server/live/hub.ts';
import { liveFrame, liveRobot, T0 } from '../support/database.ts';

const health: LiveHealth = {
	server_time_ms: T0,
	broker: true,
	engine: true,
	storage: true,
	troubles: [],
	messages_per_s: 0,
	rejected_total: 0,
	last_message_age_ms: null
};
const field: LiveField = {
	floor: 'quay-ground',
	server_time_ms: T0,
	x0_m: 0,
	y0_m: 0,
	cell_m: 0.5,
	cols: 2,
	rows: 1,
	max_per_m2: 2,
	cells: '/wI='
};
const alarm = (change: Partial<LiveAlarm> = {}): LiveAlarm => ({
	id: 1,
	type: 'stall',
	priority: 'medium',
	state: 'unacknowledged',
	floor: 'quay-ground',
	zone: null,
	place: 'Ground',
	what: 'P1 stands',
	action: 'Send someone.',
	x_m: null,
	y_m: null,
	raised_at_ms: T0,
	onset_ms: T0,
	returned_at_ms: null,
	acknowledged_at_ms: null,
	acknowledged_by: null,
	robots: ['porter-1'],
	incidents: ['i1'],
	revision: 1,
	...change
});

let nowMs = T0;
let hub: LiveHub;
beforeEach(() => {
	nowMs = T0;
	hub = createHub({ health, now: () => nowMs });
});
afterEach(() => hub.close());

/** A frame `s` seconds after T0. */
const frameAt = (s: number, change: Parameters<typeof liveFrame>[0] = {}) => {
	nowMs = T0 + s * 1000;
	return liveFrame({ server_time_ms: nowMs, ...change });
};

/** Data of a sent event, read back from its bytes as a browser would. */
const dataOf = ({ bytes }: SentEvent): LiveEvent['data'] =>
	JSON.parse(/^data: (.*)$/m.exec(new TextDecoder().decode(bytes))![1]!) as LiveEvent['data'];

function listen(floor = 'quay-ground', lastEventId: string | null = null, from = hub) {
	const heard: SentEvent[] = [];
	let closed = 0;
	const stop = from.subscribe(floor, { next: (event) => heard.push(event), close: () => closed++ }, lastEventId);
	return { heard, names: () => heard.map(({ event }) => event), stop, closed: () => closed };
}

describe('a reader', () => {
	it('gets a snapshot with everything that is known, then changes', () => {
		hub.publishFrame(frameAt(0, { robots: [liveRobot('a'), liveRobot('b')] }));
		hub.publishField(field);
		hub.publishAlarm(alarm());
		const { heard, names } = listen();
		hub.publishFrame(frameAt(0.2, { robots: [liveRobot('a'), liveRobot('b', { x_m: 7 })] }));
		expect(names()).toEqual(['snapshot', 'delta']);
		expect(dataOf(heard[0]!)).toMatchObject({ field, alarms: [alarm()], health, frame: { server_time_ms: T0 } });
		expect(dataOf(heard[1]!)).toMatchObject({ robots: [{ key: 'b', x_m: 7 }], robots_gone: [] });
	});

	it('before the first frame hears of health, and gets the snapshot with the frame', () => {
		const { heard, names } = listen();
		hub.publishFrame(frameAt(0));
		hub.publishFrame(frameAt(0.2));
		expect(names()).toEqual(['health', 'snapshot', 'delta']);
		expect(dataOf(heard[0]!)).toEqual(health);
	});

	it('hears at most five deltas a second, each from the frame it has, and nothing is lost between', () => {
		const { heard } = listen();
		const xs = Array.from({ length: 11 }, (_, i) => i / 10);
		for (const x of xs) hub.publishFrame(frameAt(x, { robots: [liveRobot('a', { x_m: x })] }));
		const deltas = heard.slice(2).map((event) => dataOf(event));
		expect(deltas.map((delta) => (delta as LiveDelta).robots[0]?.x_m)).toEqual([0.2, 0.4, 0.6, 0.8, 1]);
		expect(hub.latestFrame('quay-ground')?.server_time_ms).toBe(T0 + 1000);
	});

	it('goes on hearing when the clock is set back', () => {
		const { names } = listen();
		hub.publishFrame(frameAt(3600));
		hub.publishFrame(frameAt(0));
		expect(names()).toEqual(['health', 'snapshot', 'delta']);
	});

	it('gets a new snapshot when a zone is gone', () => {
		const zone = { key: 'hall' } as never;
		hub.publishFrame(frameAt(0, { zones: [zone] }));
		const { names } = listen();
		hub.publishFrame(frameAt(1, { zones: [] }));
		expect(names()).toEqual(['snapshot', 'snapshot']);
	});

	it('hears the alarms of its venue, of every floor and of none, and not those of another venue', () => {
		hub.publishFrame(frameAt(0));
		hub.publishFrame(liveFrame({ floor: 'quay-upper' }));
		hub.publishFrame(liveFrame({ floor: 'mill-ground', venue: 'mill' }));
		const [ground, upper, mill] = [listen(), listen('quay-upper'), listen('mill-ground')];
		hub.publishAlarm(alarm());
		hub.publishAlarm(alarm({ id: 2, floor: null, type: 'ingest' }));
		const ids = ({ heard }: typeof ground) => heard.slice(1).map((event) => (dataOf(event) as LiveAlarm).id);
		expect([ids(ground), ids(upper), ids(mill)]).toEqual([[1, 2], [1, 2], [2]]);
	});

	it('never hears an older revision after a newer one, and finds no cleared alarm in its snapshot', () => {
		hub.publishFrame(frameAt(0));
		const { heard } = listen();
		hub.publishAlarm(alarm({ revision: 3, state: 'acknowledged' }));
		hub.publishAlarm(alarm({ revision: 2 }));
		hub.publishAlarm(alarm({ revision: 4, state: 'cleared' }));
		expect(heard.slice(1).map((event) => (dataOf(event) as LiveAlarm).revision)).toEqual([3, 4]);
		expect(dataOf(listen().heard[0]!)).toMatchObject({ alarms: [] });
	});

	it('that left hears nothing more, and may leave twice', () => {
		hub.publishFrame(frameAt(0));
		const { names, stop } = listen();
		stop();
		stop();
		hub.publishFrame(frameAt(1));
		expect([names(), hub.readers]).toEqual([['snapshot'], 0]);
	});

	it('is told the end, once, and a later one at once', () => {
		const { closed } = listen();
		hub.close();
		hub.close();
		expect([closed(), listen().closed(), hub.readers]).toEqual([1, 1, 0]);
	});

	it('shares the bytes of an event with all the others', () => {
		hub.publishFrame(frameAt(0));
		const [a, b] = [listen(), listen()];
		hub.publishFrame(frameAt(1));
		expect(a.heard[1]!.bytes).toBe(b.heard[1]!.bytes);
	});
});

describe('after a broken line', () => {
	it('hears exactly what was missed', () => {
		hub.publishFrame(frameAt(0));
		const { heard, stop } = listen();
		hub.publishFrame(frameAt(1));
		stop();
		for (const s of [2, 3, 4]) hub.publishFrame(frameAt(s));
		const again = listen('quay-ground', heard.at(-1)!.id);
		expect(again.names()).toEqual(['delta', 'delta', 'delta']);
		expect(again.heard.map((event) => dataOf(event))).toMatchObject(
			[2, 3, 4].map((s) => ({ server_time_ms: T0 + s * 1000 }))
		);
	});

	it('hears nothing twice when nothing was missed', () => {
		hub.publishFrame(frameAt(0));
		const { heard } = listen();
		expect(listen('quay-ground', heard[0]!.id).heard).toEqual([]);
	});

	it('gets a snapshot when that was too long ago', () => {
		hub.publishFrame(frameAt(0));
		const { heard } = listen();
		for (const s of [1, 2, 13]) hub.publishFrame(frameAt(s));
		expect(listen('quay-ground', heard[0]!.id).names()).toEqual(['snapshot']);
	});

	it.each(['', 'rubbish', '-1', `${'0'.repeat(12)}-1`, `x-99999999999999999999`, 'a\u0000b-1'])(
		'gets a snapshot for an id that is not ours: %j',
		(id) => {
			hub.publishFrame(frameAt(0));
			expect(listen('quay-ground', id).names()).toEqual(['snapshot']);
		}
	);

	it('gets a snapshot when the server was started anew meanwhile', () => {
		hub.publishFrame(frameAt(0));
		const { heard } = listen();
		const restarted = createHub({ health, now: () => nowMs });
		for (const s of [1, 2, 3]) restarted.publishFrame(frameAt(s));
		expect(listen('quay-ground', heard[0]!.id, restarted).names()).toEqual(['snapshot']);
	});
});

describe('the stream', () => {
	const respond = (change: Partial<LiveStreamParts> = {}) =>
		liveResponse({
			hub,
			floor: 'quay-ground',
			lastEventId: null,
			signal: new AbortController().signal,
			mayListen: async () => true,
			...change
		});
	/** Reads until `enough` or the end. */
	const readText = async (response: Response, enough: (text: string) => boolean = () => false) => {
		const reader = response.body!.getReader();
		let text = '';
		while (!enough(text)) {
			const { done, value } = await reader.read();
			if (done) break;
			text += new TextDecoder().decode(value);
		}
		return { text, reader };
	};

	it('is an event stream by its headers and its form', async () => {
		hub.publishFrame(frameAt(0));
		const response = respond();
		expect(response.headers.get('content-type')).toBe('text/event-stream');
		const { text, reader } = await readText(response, (text) => text.includes('snapshot'));
		expect(text).toMatch(/^retry: \d+\n\nevent: snapshot\nid: [0-9a-f]{12}-1\ndata: \{.*\}\n\n$/);
		await reader.cancel();
		expect(hub.readers).toBe(0);
	});

	it('ends once when the browser leaves, by whichever way that is heard', async () => {
		const leaving = new AbortController();
		const { reader } = await readText(respond({ signal: leaving.signal }), (text) => text.includes('health'));
		expect(hub.readers).toBe(1);
		leaving.abort();
		await reader.cancel();
		expect(hub.readers).toBe(0);
	});

	it('never opens for a browser that has left already', async () => {
		expect((await readText(respond({ signal: AbortSignal.abort() }))).text).toBe('');
		expect(hub.readers).toBe(0);
	});

	it('cuts a reader off who lags too far, and nobody else', async () => {
		const onSlowReader = vi.fn();
		const slow = respond({ onSlowReader });
		const quick = listen();
		for (let s = 0; s < 200; s++) hub.publishFrame(frameAt(s));
		expect(onSlowReader).toHaveBeenCalledTimes(1);
		expect(hub.readers).toBe(1);
		expect(quick.heard).toHaveLength(201);
		await expect(readText(slow)).rejects.toThrow(/too slow/);
	});

	describe('as time goes by', () => {
		beforeEach(() => void vi.useFakeTimers());
		afterEach(() => void vi.useRealTimers());

		it('keeps the line alive with comments', async () => {
			const response = respond();
			await vi.advanceTimersByTimeAsync(31_000);
			const { text } = await readText(response, (text) => text.endsWith(':\n\n:\n\n'));
			expect(text).toContain('event: health');
		});

		it('ends the stream of somebody who may listen no longer, within a minute', async () => {
			let signedIn = true;
			respond({ mayListen: async () => signedIn });
			await vi.advanceTimersByTimeAsync(61_000);
			expect(hub.readers).toBe(1);
			signedIn = false;
			await vi.advanceTimersByTimeAsync(60_000);
			expect(hub.readers).toBe(0);
		});

		it('goes on when it cannot be said whether somebody may listen', async () => {
			respond({ mayListen: () => Promise.reject(new Error('database busy')) });
			await vi.advanceTimersByTimeAsync(61_000);
			expect(hub.readers).toBe(1);
		});

		it('leaves no timer behind', async () => {
			const leaving = new AbortController();
			respond({ signal: leaving.signal });
			expect(vi.getTimerCount()).toBe(2);
			leaving.abort();
			expect(vi.getTimerCount()).toBe(0);
		});
	});
});

describe('over a real line', () => {
	let server: Server;
	let port: number;
	const slowReaders = vi.fn();

	beforeEach(async () => {
		slowReaders.mockClear();
		server = createServer((request, response) => {
			const leaving = new AbortController();
			response.once('close', () => leaving.abort());
			const parts = { hub, floor: 'quay-ground', lastEventId: request.headers['last-event-id']?.toString() ?? null };
			const live = { ...parts, signal: leaving.signal, mayListen: async () => true, onSlowReader: slowReaders };
			void setResponse(response, liveResponse(live));
		}).listen(0, '127.0.0.1');
		await once(server, 'listening');
		port = (server.address() as AddressInfo).port;
	});
	afterEach(() => {
		server.closeAllConnections();
		server.close();
	});

	it('a reader that takes nothing in is cut off while another hears everything', async () => {
		const stalled = connect(port, '127.0.0.1');
		stalled.pause();
		stalled.write('GET / HTTP/1.1\r\nHost: desk.example.org\r\n\r\n');
		const quick = await fetch(`http://127.0.0.1:${port}/`);
		const reader = quick.body!.getReader();
		await vi.waitUntil(() => hub.readers === 2);
		// About 100 kB each, so that the line's own buffers are full soon.
		const errors = [{ code: 'x', level: 'warning', text: 'y'.repeat(100_000) }];
		let received = 0;
		for (let s = 0; hub.readers === 2 && s < 2000; s++) {
			hub.publishFrame(frameAt(s, { robots: [liveRobot('a', { errors, x_m: s })] }));
			received += (await reader.read()).value?.length ?? 0;
		}
		expect(slowReaders).toHaveBeenCalledTimes(1);
		expect(hub.readers).toBe(1);
		expect(received).toBeGreaterThan(5_000_000);
		stalled.destroy();
		await reader.cancel();
		await vi.waitUntil(() => hub.readers === 0);
	});

	it('closing the hub ends all answers, so that the server can stop', async () => {
		const response = await fetch(`http://127.0.0.1:${port}/`);
		hub.close();
		expect(await response.text()).toContain('retry:');
	});
});
