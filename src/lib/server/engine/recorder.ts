/** Turns what the engine reports into incidents, alarms and minutes in the database. */

import type { Kysely, Transaction } from 'kysely';
import type { Logger } from 'pino';
import type { LiveAlarm } from '../../contracts/live.ts';
import { guidanceFor } from '../../domain/alarms/guidance.ts';
import type { EngineEvent } from '../../domain/engine/events.ts';
import type { OpenHalt } from '../../domain/engine/robot-view.ts';
import { msFromSeconds } from '../../domain/units.ts';
import { raiseAlarm, returnAlarm } from '../alarms/condition.ts';
import type { Database, NewRow } from '../db/schema.ts';
import {
	alarmOfIncident,
	changeIncidentKind,
	countOpenOfAlarm,
	endIncident,
	insertIncident
} from '../repositories/halts.ts';
import { addDensityMinutes, addExposureMinutes } from '../repositories/minutes.ts';
import { storeResiduals } from '../repositories/residuals.ts';
import type { Site } from './site.ts';
import { startWriteQueue, type Write } from './write-queue.ts';

type Recorded = Exclude<EngineEvent, { type: 'rejected' | 'clock_stepped' }>;

export interface Recorder {
	record(site: Site, event: Recorded): void;
	/** Raises or returns the alarm about two robots with one credential. */
	duplicateCredential(site: Site, robot: string, active: boolean, atMs: number): void;
	/** Raises or returns the alarm about a broker that cannot be reached. */
	broker(site: Site, away: boolean, message: string, atMs: number): void;
	/** Keeps what was learned about how people of a floor give way. */
	learned(site: Site, floor: string, residuals: readonly number[]): void;
	trouble(): string | null;
	settle(): Promise<void>;
	stop(): Promise<void>;
}

export interface RecorderOptions {
	readonly db: Kysely<Database>;
	readonly log: Logger;
	/** Called after the commit, with the newest revision of every alarm that changed. */
	readonly onAlarm: (alarm: LiveAlarm) => void;
	readonly retryMs?: number;
}

export function startRecorder({ db, log, onAlarm, retryMs }: RecorderOptions): Recorder {
	const queue = startWriteQueue<LiveAlarm | null>({
		db,
		log,
		onCommitted(results) {
			const newest = new Map(results.flatMap((alarm) => (alarm ? [[alarm.id, alarm] as const] : [])));
			for (const alarm of newest.values()) onAlarm(alarm);
		},
		...(retryMs === undefined ? {} : { retryMs })
	});

	return {
		record: (site, event) => queue.push(writeFor(site, event)),
		duplicateCredential(site, robot, active, atMs) {
			const mark = site.marks.get(robot) ?? robot;
			queue.push((trx) =>
				active
					? raiseAlarm(trx, {
							...venueWide(site, `credential:${robot}`, atMs),
							type: 'duplicate_credential',
							priority: 'high',
							place: 'Whole venue',
							what: `Two robots use the credential of ${mark}; neither can be trusted`,
							action: 'Give one of them its own credential. Until then do not rely on what this robot shows.'
						})
					: returnByKey(trx, site, `credential:${robot}`, atMs)
			);
		},
		broker(site, away, message, atMs) {
			queue.push((trx) =>
				away
					? raiseAlarm(trx, {
							...venueWide(site, 'broker', atMs),
							type: 'ingest',
							priority: 'high',
							place: 'Whole venue',
							what: `No robot can be heard. ${message}`,
							action: 'Watch the floor by eye and have the broker and the network checked.'
						})
					: returnByKey(trx, site, 'broker', atMs)
			);
		},
		learned(site, floor, residuals) {
			if (!site.floors.has(floor)) return;
			queue.push(async (trx) => {
				await storeResiduals(trx, floor, residuals);
				return null;
			});
		},
		trouble: queue.trouble,
		settle: queue.settle,
		stop: queue.stop
	};
}

const venueWide = (site: Site, dedupeKey: string, atMs: number) => ({
	venueId: site.id,
	dedupeKey,
	floorId: null,
	zoneId: null,
	x: null,
	y: null,
	onsetMs: atMs,
	atMs
});

async function returnByKey(trx: Transaction<Database>, site: Site, dedupeKey: string, atMs: number) {
	const row = await trx
		.selectFrom('alarm')
		.select('id')
		.where('venue_id', '=', site.id)
		.where('dedupe_key', '=', dedupeKey)
		.where('state', '<>', 'cleared')
		.executeTakeFirst();
	return row ? returnAlarm(trx, row.id, atMs) : null;
}

function writeFor(site: Site, event: Recorded): Write<LiveAlarm | null> {
	switch (event.type) {
		case 'halt_started':
			return (trx) => startIncident(trx, site, event.floor, event.halt);
		case 'halt_changed':
			return async (trx) => {
				await changeIncidentKind(trx, event.halt.incident, event.halt.kind);
				return raiseFor(trx, site, event.floor, event.halt, msFromSeconds(event.at));
			};
		case 'halt_ended':
			return (trx) => closeIncident(trx, event.halt.incident, msFromSeconds(event.at), event.reason);
		case 'minutes':
			return async (trx) => {
				await addDensityMinutes(trx, densityRows(site, event));
				await addExposureMinutes(trx, exposureRows(site, event));
				return null;
			};
	}
}

async function startIncident(trx: Transaction<Database>, site: Site, floor: string, halt: OpenHalt) {
	const stored = site.floors.get(floor);
	const robotId = site.robotIds.get(halt.robot);
	if (!stored || robotId === undefined) return null;
	const { before, at } = halt;
	const around = before ?? at;
	const room = at ?? before;
	await insertIncident(trx, {
		id: halt.incident,
		venue_id: site.id,
		robot_id: robotId,
		floor_id: stored.id,
		zone_id: zoneIdOf(site, floor, halt.zone),
		cause_group: halt.causeGroup,
		kind: halt.kind,
		verdict: halt.verdict,
		onset_ms: msFromSeconds(halt.onset),
		detected_ms: msFromSeconds(halt.detectedAt),
		x_m: halt.x,
		y_m: halt.y,
		heading_rad: halt.heading,
		density_per_m2: around?.density ?? null,
		density_coverage: around?.coverage ?? null,
		room_alone_m_s: room?.roomAlone ?? null,
		room_shared_m_s: room?.roomShared ?? null,
		persons_within_2m: room?.personsWithin2m ?? null,
		nearest_person_m: room?.nearestPerson ?? null,
		observed_share: room?.observedShare ?? null,
		flexibility_m_s: room?.flexibility ?? null,
		software: halt.software,
		task_id: halt.taskId,
		evidence: JSON.stringify({ before, at })
	});
	return raiseFor(trx, site, floor, halt, msFromSeconds(halt.detectedAt));
}

/** One alarm per cause group: the first halt raises it, further ones join it. */
async function raiseFor(trx: Transaction<Database>, site: Site, floor: string, halt: OpenHalt, atMs: number) {
	const stored = site.floors.get(floor);
	if (!stored) return null;
	const { priority, what, action } = guidanceFor(halt.kind, halt.verdict);
	const zone = stored.floor.zones.find(({ key }) => key === halt.zone);
	return raiseAlarm(trx, {
		venueId: site.id,
		dedupeKey: `cause:${halt.causeGroup}`,
		type: halt.kind,
		priority,
		floorId: stored.id,
		zoneId: zoneIdOf(site, floor, halt.zone),
		place: zone ? `${zone.name}, ${stored.floor.name}` : stored.floor.name,
		what,
		action,
		x: halt.x,
		y: halt.y,
		onsetMs: msFromSeconds(halt.onset),
		atMs,
		incident: halt.incident
	});
}

async function closeIncident(trx: Transaction<Database>, id: string, endedMs: number, reason: string) {
	await endIncident(trx, id, endedMs, reason);
	const alarmId = await alarmOfIncident(trx, id);
	if (alarmId === null || alarmId === undefined) return null;
	if ((await countOpenOfAlarm(trx, alarmId)) > 0) return null;
	return returnAlarm(trx, alarmId, endedMs);
}

const zoneIdOf = (site: Site, floor: string, zone: string | null): number | null =>
	zone === null ? null : (site.floors.get(floor)?.zoneIds[zone] ?? null);

type Minutes = Extract<EngineEvent, { type: 'minutes' }>;

function densityRows(site: Site, { floor, density }: Minutes): NewRow<'density_minute'>[] {
	const stored = site.floors.get(floor);
	if (!stored) return [];
	const hidden = new Set(stored.floor.zones.flatMap((zone) => (zone.private ? [zone.key] : [])));
	return density.flatMap((row) => {
		const zoneId = stored.zoneIds[row.zone];
		if (zoneId === undefined || hidden.has(row.zone)) return [];
		return [
			{
				floor_id: stored.id,
				zone_id: zoneId,
				minute_ms: msFromSeconds(row.minute),
				mean_per_m2: row.mean,
				peak_per_m2: row.peak,
				coverage: Math.min(1, row.coverage),
				observed_m2_s: row.observedAreaS,
				person_s: row.personS
			}
		];
	});
}

function exposureRows(site: Site, { floor, exposure }: Minutes): NewRow<'exposure_minute'>[] {
	const stored = site.floors.get(floor);
	if (!stored) return [];
	return exposure.flatMap((row) => {
		const robotId = site.robotIds.get(row.robot);
		// Standing without a task is no exposure, and a year of such rows would be most of the table.
		if (robotId === undefined || (row.taskedS === 0 && row.halts === 0)) return [];
		return [
			{
				robot_id: robotId,
				floor_id: stored.id,
				zone_id: zoneIdOf(site, floor, row.zone) ?? 0,
				minute_ms: msFromSeconds(row.minute),
				band: row.band,
				tasked_s: row.taskedS,
				moving_s: row.movingS,
				distance_m: row.distance,
				halts: row.halts
			}
		];
	});
}
