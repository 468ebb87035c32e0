/** The one place live data passes through on its way to readers. Holds the present picture; knows nothing of HTTP. */

import { randomBytes } from 'node:crypto';
import type { LiveAlarm, LiveEvent, LiveField, LiveFrame, LiveHealth } from '../../contracts/live.ts';
import { canFollow, computeDelta } from './delta.ts';
import { EventLog, sentEvent, type SentEvent } from './event-log.ts';

interface LiveReader {
	next(event: SentEvent): void;
	/** No more events will come. */
	close(): void;
}

export interface LiveHub {
	/** Frames may come as often as they like; readers hear of at most one per `deltaEveryMs`. */
	publishFrame(frame: LiveFrame): void;
	publishField(field: LiveField): void;
	/** Goes to every floor of the alarm's venue; an alarm of no floor goes to all. Older revisions are ignored. */
	publishAlarm(alarm: LiveAlarm): void;
	publishHealth(health: LiveHealth): void;
	/** The newest frame of a floor, not held back by `deltaEveryMs`; null before the first. */
	latestFrame(floor: string): LiveFrame | null;
	latestFrames(): LiveFrame[];
	/**
	 * Sends `reader` what it missed since `lastEventId`, or a snapshot when that is not known, then every event.
	 * Before the first frame of a floor there is only health; the snapshot follows with the frame.
	 *
	 * @returns ends the subscription; may be called more than once
	 */
	subscribe(floor: string, reader: LiveReader, lastEventId: string | null): () => void;
	/** Open subscriptions */
	readonly readers: number;
	/** Ends all subscriptions; later ones end at once. */
	close(): void;
}

export interface HubParts {
	readonly health: LiveHealth;
	/** Alarms that are not cleared. */
	readonly alarms?: readonly LiveAlarm[];
	/** ms between two deltas of a floor; a little less than 1/5 s, so that frames made at 5 Hz all pass */
	readonly deltaEveryMs?: number;
	readonly now?: () => number;
}

interface FloorStream {
	readonly log: EventLog;
	readonly readers: Set<LiveReader>;
	/** Newest frame, and the one the readers have: a delta always starts from that. */
	latest: LiveFrame | null;
	published: LiveFrame | null;
	field: LiveField | null;
}

export function createHub({ health, alarms = [], deltaEveryMs = 190, now = Date.now }: HubParts): LiveHub {
	const boot = randomBytes(6).toString('hex');
	const floors = new Map<string, FloorStream>();
	const live = new Map(alarms.map((alarm) => [alarm.id, alarm]));
	let presentHealth = health;
	let closed = false;

	const streamOf = (floor: string): FloorStream => {
		let stream = floors.get(floor);
		if (stream === undefined) {
			stream = { log: new EventLog(boot), readers: new Set(), latest: null, published: null, field: null };
			floors.set(floor, stream);
		}
		return stream;
	};
	const venueOf = (floor: string): string | undefined => floors.get(floor)?.latest?.venue;
	const concerns = (alarm: LiveAlarm, floor: string): boolean => {
		if (alarm.floor === null || alarm.floor === floor) return true;
		const venue = venueOf(alarm.floor);
		return venue !== undefined && venue === venueOf(floor);
	};
	const send = (stream: FloorStream, event: LiveEvent) => {
		const sent = stream.log.append(event, now());
		for (const reader of [...stream.readers]) reader.next(sent);
	};
	const snapshot = (floor: string, frame: LiveFrame): LiveEvent => ({
		event: 'snapshot',
		data: {
			frame,
			field: streamOf(floor).field,
			alarms: [...live.values()].filter((alarm) => concerns(alarm, floor)),
			health: presentHealth
		}
	});

	return {
		publishFrame(frame) {
			const stream = streamOf(frame.floor);
			const before = stream.published;
			stream.latest = frame;
			const sinceMs = frame.server_time_ms - (before?.server_time_ms ?? -Infinity);
			// A clock set back must not silence the stream.
			if (sinceMs >= 0 && sinceMs < deltaEveryMs) return;
			stream.published = frame;
			const event: LiveEvent =
				before !== null && canFollow(before, frame)
					? { event: 'delta', data: computeDelta(before, frame) }
					: snapshot(frame.floor, frame);
			send(stream, event);
		},

		publishField(field) {
			const stream = streamOf(field.floor);
			stream.field = field;
			send(stream, { event: 'field', data: field });
		},

		publishAlarm(alarm) {
			if ((live.get(alarm.id)?.revision ?? 0) >= alarm.revision) return;
			if (alarm.state === 'cleared') live.delete(alarm.id);
			else live.set(alarm.id, alarm);
			for (const [floor, stream] of floors) {
				if (concerns(alarm, floor)) send(stream, { event: 'alarm', data: alarm });
			}
		},

		publishHealth(news) {
			presentHealth = news;
			for (const stream of floors.values()) send(stream, { event: 'health', data: news });
		},

		latestFrame: (floor) => floors.get(floor)?.latest ?? null,
		latestFrames: () => [...floors.values()].flatMap(({ latest }) => latest ?? []),

		subscribe(floor, reader, lastEventId) {
			if (closed) {
				reader.close();
				return () => {};
			}
			const stream = streamOf(floor);
			const missed = stream.log.since(lastEventId);
			stream.readers.add(reader);
			if (missed !== null) {
				for (const event of missed) reader.next(event);
			} else {
				const first: LiveEvent =
					stream.published === null ? { event: 'health', data: presentHealth } : snapshot(floor, stream.published);
				reader.next(sentEvent(stream.log.lastId, first));
			}
			return () => void stream.readers.delete(reader);
		},

		get readers() {
			let count = 0;
			for (const { readers } of floors.values()) count += readers.size;
			return count;
		},

		close() {
			closed = true;
			for (const { readers } of floors.values()) {
				for (const reader of [...readers]) reader.close();
				readers.clear();
			}
		}
	};
}
