/** One floor as the live stream tells it. Owns the connection: it reconnects, wakes after sleep, and knows how old it is. */

import { untrack } from 'svelte';
import type { LiveAlarm, LiveDelta, LiveField, LiveFrame, LiveHealth } from '../contracts/live.ts';
import { leastLag } from './lag.ts';
import { mergeAlarm, mergeDelta } from './live-merge.ts';

export type Link = 'connecting' | 'open' | 'lost' | 'signed-out';

interface Snapshot {
	readonly frame: LiveFrame | null;
	readonly field: LiveField | null;
	readonly alarms: readonly LiveAlarm[];
	readonly health: LiveHealth;
}

/** Called for every frame with the local time it came, outside the reactive graph: the plan draws at its own pace. */
export type FrameListener = (frame: LiveFrame, receivedAtMs: number) => void;

/** ms without an event after which the line is taken for dead. The server sends several a second. Chosen by us. */
const SILENT_AFTER_MS = 5000;
/** ms a page may be hidden before its stream is opened afresh. Chosen by us. */
const STALE_HIDDEN_MS = 10_000;
const RETRY_MS = [1000, 2000, 4000, 8000, 15_000];
/** The words "0.4 s ago" change this often. */
const TICK_MS = 500;

export class LiveFloor {
	frame = $state.raw<LiveFrame | null>(null);
	field = $state.raw<LiveField | null>(null);
	alarms = $state.raw<readonly LiveAlarm[]>([]);
	health = $state.raw<LiveHealth | null>(null);
	link = $state<Link>('connecting');
	/** Local time, ms; moves twice a second so that ages in words move. */
	now = $state(Date.now());
	/** Server minus local clock as far as it shows, ms; add it to local times. */
	readonly #lag = $state<{ ms: number | null }>({ ms: null });

	readonly #url: string;
	// Listeners stand outside the reactive graph on purpose.
	// eslint-disable-next-line svelte/prefer-svelte-reactivity
	readonly #listeners = new Set<FrameListener>();
	#source: EventSource | null = null;
	#lastEventAt = 0;
	#failures = 0;
	#hiddenSince: number | null = null;
	#retry: ReturnType<typeof setTimeout> | undefined;
	#tick: ReturnType<typeof setInterval> | undefined;
	#closed = false;

	/** @param floor key of the floor; the stream opens with `open()` */
	constructor(readonly floor: string) {
		this.#url = `/api/v1/floors/${encodeURIComponent(floor)}/live`;
	}

	/** Server time now, ms since the epoch; local time before the first event. */
	get serverNow(): number {
		return this.now - (this.#lag.ms ?? 0);
	}

	/** ms since the last frame was made; null before the first. */
	get ageMs(): number | null {
		return this.frame ? Math.max(0, this.serverNow - this.frame.server_time_ms) : null;
	}

	/** Opens the stream; the returned function closes it for good. */
	open(): () => void {
		this.#connect();
		this.#tick = setInterval(() => this.#onTick(), TICK_MS);
		const onVisible = () => this.#onVisibility();
		const onOnline = () => this.#connect();
		document.addEventListener('visibilitychange', onVisible);
		window.addEventListener('online', onOnline);
		window.addEventListener('pageshow', onVisible);
		return () => {
			this.#closed = true;
			clearInterval(this.#tick);
			clearTimeout(this.#retry);
			document.removeEventListener('visibilitychange', onVisible);
			window.removeEventListener('online', onOnline);
			window.removeEventListener('pageshow', onVisible);
			this.#source?.close();
			this.#listeners.clear();
		};
	}

	/** Hears every frame from now on, starting with the present one; the returned function ends it. */
	onFrame(listener: FrameListener): () => void {
		this.#listeners.add(listener);
		// Who listens from an effect must not be run again by every frame.
		const present = untrack(() => this.frame);
		if (present) listener(present, Date.now());
		return () => this.#listeners.delete(listener);
	}

	/** Takes in an alarm known from elsewhere, such as the answer to an acknowledgement. */
	learn(alarm: LiveAlarm): void {
		this.alarms = mergeAlarm(this.alarms, alarm);
	}

	#connect(): void {
		if (this.#closed) return;
		clearTimeout(this.#retry);
		this.#source?.close();
		this.#lastEventAt = Date.now();
		const source = (this.#source = new EventSource(this.#url));
		const on = <T>(name: string, take: (data: T) => void) =>
			source.addEventListener(name, (event) => {
				if (this.#source !== source) return;
				this.#lastEventAt = Date.now();
				this.link = 'open';
				take(JSON.parse((event as MessageEvent<string>).data) as T);
			});
		source.addEventListener('error', () => this.#source === source && void this.#onError(source));
		on<Snapshot>('snapshot', (snapshot) => this.#onSnapshot(snapshot));
		on<LiveDelta>('delta', (delta) => this.#onDelta(delta));
		on<LiveField>('field', (field) => (this.field = field));
		on<LiveAlarm>('alarm', (alarm) => this.learn(alarm));
		on<LiveHealth>('health', (health) => (this.health = health));
	}

	#onSnapshot({ frame, field, alarms, health }: Snapshot): void {
		this.#lag.ms = leastLag(null, Date.now(), Math.max(frame?.server_time_ms ?? 0, health.server_time_ms));
		this.field = field;
		this.alarms = alarms;
		this.health = health;
		if (frame) this.#show(frame);
	}

	#onDelta(delta: LiveDelta): void {
		if (!this.frame) return;
		this.#failures = 0;
		this.#lag.ms = leastLag(this.#lag.ms, Date.now(), delta.server_time_ms);
		this.#show(mergeDelta(this.frame, delta));
	}

	#show(frame: LiveFrame): void {
		this.frame = frame;
		this.now = Date.now();
		for (const listener of this.#listeners) listener(frame, this.now);
	}

	/** The browser retries a broken line by itself, but gives up for good on an answer that is not a stream. */
	async #onError(source: EventSource): Promise<void> {
		if (this.link !== 'signed-out') this.link = 'lost';
		if (source.readyState !== EventSource.CLOSED) return;
		const answer = await fetch('/api/v1/health').catch(() => null);
		if (this.#source !== source || this.#closed) return;
		this.link = answer?.status === 401 ? 'signed-out' : 'lost';
		this.#retry = setTimeout(() => this.#connect(), this.#backOff());
	}

	#backOff(): number {
		return RETRY_MS[Math.min(this.#failures++, RETRY_MS.length - 1)] ?? 1000;
	}

	#onTick(): void {
		this.now = Date.now();
		if (this.#hiddenSince !== null) return;
		const patience =
			SILENT_AFTER_MS + (this.#failures && (RETRY_MS[Math.min(this.#failures, RETRY_MS.length - 1)] ?? 0));
		if (this.#source?.readyState !== EventSource.CLOSED && this.now - this.#lastEventAt > patience) {
			this.#failures++;
			this.link = 'lost';
			this.#connect();
		}
	}

	#onVisibility(): void {
		if (document.visibilityState === 'hidden') {
			this.#hiddenSince ??= Date.now();
			return;
		}
		const hiddenMs = this.#hiddenSince === null ? 0 : Date.now() - this.#hiddenSince;
		this.#hiddenSince = null;
		this.now = Date.now();
		// A laptop that slept was not "hidden", so a long gap in events counts as well.
		if (hiddenMs > STALE_HIDDEN_MS || this.now - this.#lastEventAt > SILENT_AFTER_MS) this.#connect();
	}
}
