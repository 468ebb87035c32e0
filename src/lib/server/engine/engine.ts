/** The engine at work: takes robots' messages in, steps every venue ten times a second, records what happens and tells the desk. */

import type { Logger } from 'pino';
import type { LiveHealth } from '../../contracts/live.ts';
import { toLiveField, toLiveFrame } from '../../contracts/live-frame.ts';
import { robotTopic } from '../../contracts/mqtt.ts';
import type { EngineStart, FromEngine } from '../../contracts/threads.ts';
import type { EngineEvent } from '../../domain/engine/events.ts';
import type { Observation, RobotObservation } from '../../domain/engine/observation.ts';
import { createVenueState, forgetFlexibility, stepVenue, type VenueState } from '../../domain/engine/venue-engine.ts';
import { secondsFromMs } from '../../domain/units.ts';
import { openDatabase } from '../db/connection.ts';
import { createIntake } from '../ingest/intake.ts';
import { startMqttSource } from '../ingest/mqtt-source.ts';
import { startRejectedLog } from '../ingest/rejected.ts';
import { startRecorder } from './recorder.ts';
import { readSites, type Site } from './site.ts';

const TICK_MS = 100;
/** Ticks between two frames (5 Hz), two fields (1 Hz) and two words about health (1 Hz) */
const FRAME_TICKS = 2;
const FIELD_TICKS = 10;
const HEALTH_TICKS = 10;
/** Ticks between two times that what was learned about people is stored */
const LEARNED_TICKS = 600;
/** Observations waiting for a tick beyond which the oldest are dropped: 200 robots send 6,000 in 1.5 s. */
const MOST_WAITING = 20_000;
/** ms the broker may be away before it is an alarm and not a hiccup */
const BROKER_ALARM_MS = 5000;
/** s the server's clock may be set back before everything that counts on it starts anew */
const CLOCK_SET_BACK_S = 5;

export interface Engine {
	/** Reads floors, zones and robots again; floors that did not change go on as they are. */
	reload(): Promise<void>;
	forgetFlexibility(venue: string): void;
	stop(): Promise<void>;
}

interface Running {
	site: Site;
	state: VenueState;
	waiting: Observation[];
}

/** @throws Failure 'storage' when the database cannot be read at the start */
export async function startEngine(
	start: EngineStart,
	log: Logger,
	post: (message: FromEngine) => void,
	wallMs: () => number = Date.now
): Promise<Engine> {
	const database = openDatabase(start.database_path);
	const rejected = startRejectedLog({ db: database.db, log });
	const recorder = startRecorder({ db: database.db, log, onAlarm: (alarm) => post({ type: 'alarm', alarm }) });
	const venues = new Map<string, Running>();
	for (const site of await readSites(database.db, start.venues)) venues.set(site.key, begin(site));

	let dropped = 0;
	const intake = createIntake({
		robots: (venue, robot) => venues.get(venue)?.site.robotIds.has(robot) ?? false,
		rejected,
		onObservation(venue, observation) {
			const running = venues.get(venue)!;
			if (running.waiting.length >= MOST_WAITING) {
				running.waiting.shift();
				dropped += 1;
			}
			running.waiting.push(observation);
		},
		onDuplicate({ venue, robot, active, atMs }) {
			const running = venues.get(venue);
			if (running) recorder.duplicateCredential(running.site, robot, active, atMs);
		}
	});
	let brokerAwaySince: number | null = wallMs();
	let brokerTrouble = 'The broker has not been reached yet.';
	let brokerAlarmed = false;
	const source = startMqttSource({
		url: start.mqtt_url,
		username: start.mqtt_username,
		password: start.mqtt_password,
		venues: start.venues,
		onMessage: (topic, payload, retained) => intake.take(topic, payload, retained, wallMs()),
		onState(state) {
			const listening = state.kind === 'connected';
			brokerAwaySince = listening ? null : (brokerAwaySince ?? wallMs());
			if (state.kind === 'disconnected') brokerTrouble = state.message;
			log.info({ state }, 'broker connection');
			const receivedAt = secondsFromMs(wallMs());
			for (const { waiting } of venues.values()) waiting.push({ kind: 'listening', receivedAt, listening });
		}
	});

	let last = -Infinity;
	let ticks = 0;
	let receivedBefore = 0;
	let stopped = false;

	function tick(): void {
		const wall = secondsFromMs(wallMs());
		if (wall < last - CLOCK_SET_BACK_S) {
			log.warn({ back_s: last - wall }, 'The server’s clock was set back; live tracks start anew.');
			for (const running of venues.values()) running.state = begin(running.site, running.state).state;
			last = -Infinity;
		}
		const now = Math.max(wall, last);
		last = now;
		ticks += 1;
		for (const running of venues.values()) stepOne(running, now);
		intake.tick(wallMs());
		if (ticks % HEALTH_TICKS === 0) {
			watchBroker();
			if (ticks % LEARNED_TICKS === 0) keepLearned();
			post({ type: 'health', health: health() });
		}
	}

	function stepOne(running: Running, now: number): void {
		const { site } = running;
		const observations = running.waiting;
		running.waiting = [];
		const { state, frames, events } = stepVenue(site.context, running.state, observations, now);
		running.state = state;
		for (const event of events) takeEvent(site, event);
		for (const frame of frames) {
			const { model } = site.context.floors.get(frame.floor)!;
			if (ticks % FRAME_TICKS === 0) post({ type: 'frame', frame: toLiveFrame(site.key, model, frame) });
			if (ticks % FIELD_TICKS === 0 && frame.field) {
				post({ type: 'field', field: toLiveField(model, frame.field) });
			}
		}
	}

	function takeEvent(site: Site, event: EngineEvent): void {
		if (event.type === 'rejected') {
			const { reason, detail, said, at } = event;
			const topic = robotTopic(site.key, said.robot, said.kind);
			rejected.record({ reason, robot: said.robot, detail }, topic, asUnderstood(said), Math.round(at * 1000));
		} else if (event.type === 'clock_stepped') {
			log.info({ robot: event.robot, offset_s: event.offset }, 'A robot’s clock was set.');
		} else recorder.record(site, event);
	}

	function keepLearned(): void {
		for (const { site, state } of venues.values()) {
			for (const [floor, { flexibility }] of state.floors) recorder.learned(site, floor, flexibility.residuals);
		}
	}

	function watchBroker(): void {
		const away = brokerAwaySince !== null && wallMs() - brokerAwaySince > BROKER_ALARM_MS;
		if (away === brokerAlarmed) return;
		brokerAlarmed = away;
		for (const { site } of venues.values()) recorder.broker(site, away, brokerTrouble, wallMs());
	}

	function health(): LiveHealth {
		const at = wallMs();
		const received = intake.received();
		const perSecond = (received - receivedBefore) / ((HEALTH_TICKS * TICK_MS) / 1000);
		receivedBefore = received;
		const storage = recorder.trouble();
		const troubles: string[] = [];
		if (brokerAwaySince !== null) troubles.push(`${brokerTrouble} Robots cannot be heard; what you see is old.`);
		if (storage) troubles.push(storage);
		for (const name of intake.duplicates()) troubles.push(`Two robots use the credential of ${name}.`);
		if (dropped > 0) troubles.push(`The engine cannot keep up: ${dropped} messages were left out.`);
		const lastMessageAt = intake.lastMessageAtMs();
		return {
			server_time_ms: at,
			broker: brokerAwaySince === null,
			engine: true,
			storage: storage === null,
			troubles,
			messages_per_s: Math.round(perSecond),
			rejected_total: rejected.total(),
			last_message_age_ms: lastMessageAt === null ? null : Math.max(0, at - lastMessageAt)
		};
	}

	const timer = setInterval(tick, TICK_MS);

	return {
		async reload() {
			const sites = await readSites(database.db, start.venues);
			if (stopped) return;
			const listening = source.state().kind === 'connected';
			const present = new Set(sites.map(({ key }) => key));
			for (const key of venues.keys()) if (!present.has(key)) venues.delete(key);
			for (const site of sites) {
				const running = venues.get(site.key);
				const next = running ? { ...continued(running, site), waiting: running.waiting } : begin(site);
				next.waiting.push({ kind: 'listening', receivedAt: secondsFromMs(wallMs()), listening });
				venues.set(site.key, next);
			}
		},
		forgetFlexibility(venue) {
			const running = venues.get(venue);
			if (!running) return;
			running.state = forgetFlexibility(running.site.context, running.state);
			keepLearned();
		},
		async stop() {
			stopped = true;
			clearInterval(timer);
			await source.stop();
			keepLearned();
			await recorder.stop();
			await rejected.stop();
			await database.close();
		}
	};
}

/** A venue from the start, with the halts that are open in the database or, if given, in an earlier state. */
function begin(site: Site, before?: VenueState): Running {
	const open = before
		? new Map(
				[...before.floors].map(([key, { robots }]) => [key, [...robots.values()].flatMap((view) => view.open ?? [])])
			)
		: site.openHalts;
	const residuals = before
		? new Map([...before.floors].map(([key, { flexibility }]) => [key, flexibility.residuals]))
		: site.residuals;
	return { site, state: createVenueState(site.context, { openHalts: open, residuals }), waiting: [] };
}

/** A venue after a change in the database: floors that are still the same keep all they know. */
function continued(running: Running, site: Site): { site: Site; state: VenueState } {
	const fresh = createVenueState(site.context, site);
	const floors = new Map(
		[...fresh.floors].map(([key, state]) => {
			const was = running.site.floors.get(key);
			const kept = running.state.floors.get(key);
			const same = was && kept && JSON.stringify(was.floor) === JSON.stringify(site.floors.get(key)?.floor);
			return [key, same ? kept : state];
		})
	);
	const floorOfRobot = new Map<string, string>();
	for (const [key, { robots }] of floors) for (const robot of robots.keys()) floorOfRobot.set(robot, key);
	const { waiting, learned } = running.state;
	return { site, state: { floors, floorOfRobot, waiting, learned } };
}

/** What is kept of a message the engine could not use: its content as it was understood. */
const asUnderstood = (said: RobotObservation): Uint8Array => Buffer.from(JSON.stringify(said));
