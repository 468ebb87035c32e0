import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { LiveFloor } from './live-floor.svelte.ts';

/** Stands in for the browser's EventSource: the test speaks for the server. */
class FakeSource extends EventTarget {
	static readonly CONNECTING = 0;
	static readonly OPEN = 1;
	static readonly CLOSED = 2;
	static readonly all: FakeSource[] = [];
	readyState = FakeSource.OPEN;

	constructor(readonly url: string) {
		super();
		FakeSource.all.push(this);
	}

	close() {
		this.readyState = FakeSource.CLOSED;
	}

	say(event: string, data: unknown) {
		this.dispatchEvent(new MessageEvent(event, { data: JSON.stringify(data) }));
	}

	fail(readyState: number) {
		this.readyState = readyState;
		this.dispatchEvent(new Event('error'));
	}
}

const page = Object.assign(new EventTarget(), { visibilityState: 'visible' });
const latest = () => FakeSource.all.at(-1) as FakeSource;
const health = () => ({ server_time_ms: Date.now(), troubles: [] });
const frame = () => ({ floor: 'f', server_time_ms: Date.now(), robots: [], zones: [], halts: [], persons: [] });
const snapshot = () => ({ frame: frame(), field: null, alarms: [], health: health() });
const delta = (server_time_ms = Date.now()) => ({
	server_time_ms,
	robots: [],
	robots_gone: [],
	persons: [],
	zones: []
});

let floor: LiveFloor;
let close: () => void;

beforeEach(() => {
	vi.useFakeTimers({ now: Date.UTC(2026, 2, 3, 14) });
	vi.stubGlobal('EventSource', FakeSource);
	vi.stubGlobal('document', page);
	vi.stubGlobal('window', new EventTarget());
	vi.stubGlobal(
		'fetch',
		vi.fn(async () => ({ status: 200 }))
	);
	FakeSource.all.length = 0;
	page.visibilityState = 'visible';
	floor = new LiveFloor('saltmarsh-ground');
	close = floor.open();
});

afterEach(() => {
	close();
	vi.useRealTimers();
	vi.unstubAllGlobals();
});

const show = (state: 'hidden' | 'visible') => {
	page.visibilityState = state;
	page.dispatchEvent(new Event('visibilitychange'));
};

it('takes the snapshot, then the changes, and tells its listeners both', () => {
	const heard: number[] = [];
	floor.onFrame(({ server_time_ms }) => heard.push(server_time_ms));
	latest().say('snapshot', snapshot());
	latest().say('delta', delta(Date.now() + 200));
	expect(floor.link).toBe('open');
	expect(heard).toEqual([Date.now(), Date.now() + 200]);
});

it('counts the age of the data from the moment the server made it', () => {
	latest().say('snapshot', snapshot());
	vi.advanceTimersByTime(3000);
	expect(floor.ageMs).toBe(3000);
	latest().say('delta', delta(Date.now() - 2500));
	expect(floor.ageMs).toBe(2500);
});

it('opens a fresh stream when no event came for five seconds', () => {
	latest().say('snapshot', snapshot());
	vi.advanceTimersByTime(5000);
	expect(FakeSource.all).toHaveLength(1);
	vi.advanceTimersByTime(1000);
	expect(FakeSource.all).toHaveLength(2);
	expect(floor.link).toBe('lost');
});

it('grows more patient while reopening brings nothing new', () => {
	for (let i = 0; i < 60; i++) {
		vi.advanceTimersByTime(1000);
		if (i % 6 === 0) latest().say('snapshot', snapshot());
	}
	expect(FakeSource.all.length).toBeLessThan(10);
});

it('does not wait for ever for a line that never opens', () => {
	latest().readyState = FakeSource.CONNECTING;
	vi.advanceTimersByTime(6000);
	expect(FakeSource.all).toHaveLength(2);
});

it('starts over after the page was hidden for long, not after a glance away', () => {
	latest().say('snapshot', snapshot());
	show('hidden');
	vi.advanceTimersByTime(4000);
	show('visible');
	expect(FakeSource.all).toHaveLength(1);
	show('hidden');
	vi.advanceTimersByTime(11_000);
	show('visible');
	expect(FakeSource.all).toHaveLength(2);
});

it('waits for the browser’s own retry while the line is merely broken', () => {
	latest().fail(FakeSource.CONNECTING);
	expect(floor.link).toBe('lost');
	vi.advanceTimersByTime(4000);
	expect(FakeSource.all).toHaveLength(1);
});

describe('when the browser gives up', () => {
	it('tries again, ever more slowly', async () => {
		const opened = [];
		for (let i = 0; i < 3; i++) {
			latest().fail(FakeSource.CLOSED);
			const before = Date.now();
			const count = FakeSource.all.length;
			while (FakeSource.all.length === count) await vi.advanceTimersByTimeAsync(500);
			opened.push(Date.now() - before);
		}
		expect(opened).toEqual([1000, 2000, 4000]);
	});

	it('says so when the session has ended', async () => {
		vi.mocked(fetch).mockResolvedValue({ status: 401 } as Response);
		latest().fail(FakeSource.CLOSED);
		await vi.advanceTimersByTimeAsync(1);
		expect(floor.link).toBe('signed-out');
	});
});

it('ignores what an abandoned stream still says', () => {
	const first = latest();
	first.say('snapshot', snapshot());
	vi.advanceTimersByTime(6000);
	latest().say('snapshot', snapshot());
	const known = floor.frame?.server_time_ms;
	first.say('delta', delta(1));
	expect(floor.frame?.server_time_ms).toBe(known);
});

it('keeps the newer of two tellings of an alarm', () => {
	latest().say('snapshot', snapshot());
	floor.learn({ id: 1, revision: 2, state: 'acknowledged' } as never);
	latest().say('alarm', { id: 1, revision: 1, state: 'unacknowledged' });
	expect(floor.alarms.map(({ state }) => state)).toEqual(['acknowledged']);
});
