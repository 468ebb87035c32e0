import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { bandOf } from '../../src/lib/domain/engine/tally.ts';
import { openDatabase, type OpenDatabase } from '../../src/lib/server/db/connection.ts';
import { createRandom } from '../core/random.ts';
import { seed, type SeedOptions } from '../seed.ts';
import { openDays, OPEN_MINUTES } from './days.ts';
import { haltRate, KINDS, LAW } from './law.ts';

vi.setConfig({ testTimeout: 60_000, hookTimeout: 60_000 });

const folder = mkdtempSync(join(tmpdir(), 'seed-'));
const options: SeedOptions = {
	databasePath: join(folder, 'seed.db'),
	passwordsFile: join(folder, 'robots.json'),
	signInFile: join(folder, 'sign-in.json'),
	password: 'a password for tests',
	// A Wednesday; the week before it begins on Monday 2026-06-01.
	nowMs: Date.UTC(2026, 5, 10, 9, 30),
	weeks: 1,
	log: () => {}
};
let database: OpenDatabase;
const all = <T>(text: string) => database.raw.prepare(text).all() as T[];

beforeAll(async () => {
	await seed(options);
	database = openDatabase(options.databasePath);
});
afterAll(async () => {
	await database.close();
	rmSync(folder, { recursive: true });
});

describe('the law', () => {
	it('rises with density for freezes and dithers only, and stays finite', () => {
		for (const kind of KINDS) {
			const rises = haltRate(kind, 1, false) > haltRate(kind, 0.1, false);
			expect(rises).toBe(LAW[kind].slope > 0);
			expect(haltRate(kind, 50, false)).toBe(haltRate(kind, 2, false));
		}
		expect(haltRate('freeze', 0.5, true)).toBeLessThan(haltRate('freeze', 0.5, false));
	});
});

describe('opening days', () => {
	it('are Monday to Saturday of whole past weeks, from ten by the venue’s clock through the change to summer time', () => {
		const days = openDays(Date.UTC(2026, 3, 8), 2, 'Europe/London', createRandom(1));
		expect(days).toHaveLength(12);
		const shown = days.map(({ opensMs }) =>
			new Intl.DateTimeFormat('en-GB', {
				timeZone: 'Europe/London',
				weekday: 'short',
				hour: '2-digit',
				minute: '2-digit'
			}).format(opensMs)
		);
		expect(shown.filter((text) => text.includes('10:00'))).toHaveLength(12);
		expect(shown[0]).toContain('Mon');
		// Clocks went forward on 29 March 2026.
		expect(new Date(days[5]!.opensMs).getUTCHours()).toBe(10);
		expect(new Date(days[6]!.opensMs).getUTCHours()).toBe(9);
		expect(Math.max(...days.map(({ opensMs }) => opensMs)) + OPEN_MINUTES * 60_000).toBeLessThan(Date.UTC(2026, 3, 8));
	});
});

describe('the seeded database', () => {
	it('has floors, robots, accounts and history', () => {
		const count = (table: string) => all<{ n: number }>(`SELECT count(*) n FROM ${table}`)[0]!.n;
		expect([count('floor'), count('robot'), count('user')]).toEqual([2, 24, 5]);
		expect(count('incident')).toBeGreaterThan(50);
		expect(count('density_minute')).toBe(6 * OPEN_MINUTES * (12 + 9));
	});

	it('counts the same halts in every table: each incident has one exposed minute, one alarm and its events', () => {
		const [sum] = all<{ halts: number; incidents: number; alarms: number }>(
			`SELECT (SELECT sum(halts) FROM exposure_minute) halts, (SELECT count(*) FROM incident) incidents, (SELECT count(*) FROM alarm) alarms`
		);
		expect(sum!.halts).toBe(sum!.incidents);
		expect(sum!.alarms).toBe(sum!.incidents);
		const lost = all(
			`SELECT i.id FROM incident i LEFT JOIN exposure_minute e ON e.robot_id = i.robot_id AND e.zone_id = i.zone_id
				AND e.minute_ms = i.onset_ms - i.onset_ms % 60000 AND e.halts > 0 WHERE e.robot_id IS NULL`
		);
		expect(lost).toEqual([]);
		for (const { density_per_m2, band } of all<{ density_per_m2: number | null; band: string }>(
			`SELECT i.density_per_m2, e.band FROM incident i JOIN exposure_minute e ON e.robot_id = i.robot_id
				AND e.minute_ms = i.onset_ms - i.onset_ms % 60000 AND e.halts > 0`
		)) {
			// Three decimals may round a density onto the bound of the next band.
			expect([bandOf(density_per_m2), bandOf(density_per_m2 === null ? null : density_per_m2 - 0.0006)]).toContain(
				band
			);
		}
	});

	it('never exposes a halted robot: no tasked time between onset and end', () => {
		const overlapping = all(
			`SELECT i.id FROM incident i JOIN exposure_minute e ON e.robot_id = i.robot_id
				AND e.minute_ms > i.onset_ms AND e.minute_ms + 60000 <= i.ended_ms AND e.tasked_s > 0`
		);
		expect(overlapping).toEqual([]);
		expect(all('SELECT * FROM exposure_minute WHERE tasked_s > 60 OR moving_s > tasked_s')).toEqual([]);
	});

	it('says not measured, never zero, where too little was seen', () => {
		const rows = all<{ coverage: number; mean_per_m2: number | null }>(
			'SELECT coverage, mean_per_m2 FROM density_minute'
		);
		expect(rows.some(({ mean_per_m2 }) => mean_per_m2 === null)).toBe(true);
		for (const { coverage, mean_per_m2 } of rows) expect(mean_per_m2 === null).toBe(coverage < 0.3);
	});

	it('keeps nothing about the private rooms', () => {
		expect(
			all(
				`SELECT 1 FROM zone z WHERE z.private = 1 AND (EXISTS (SELECT 1 FROM density_minute d WHERE d.zone_id = z.id)
					OR EXISTS (SELECT 1 FROM incident i WHERE i.zone_id = z.id) OR EXISTS (SELECT 1 FROM exposure_minute e WHERE e.zone_id = z.id))`
			)
		).toEqual([]);
	});

	it('tells each alarm’s life in order: raised when noticed, ended with its halt, cleared once seen and over', () => {
		const wrong = all(
			`SELECT a.id FROM alarm a JOIN incident i ON i.alarm_id = a.id
				WHERE a.state <> 'cleared' OR a.raised_at_ms <> i.detected_ms OR a.returned_at_ms <> i.ended_ms OR a.onset_ms <> i.onset_ms
					OR a.raised_at_ms < a.onset_ms OR a.acknowledged_at_ms < a.raised_at_ms OR i.ended_ms <= i.detected_ms
					OR (SELECT count(*) FROM alarm_event e WHERE e.alarm_id = a.id) <> 3
					OR (SELECT state FROM alarm_event e WHERE e.alarm_id = a.id ORDER BY at_ms DESC, e.id DESC LIMIT 1) <> 'cleared'`
		);
		expect(wrong).toEqual([]);
	});

	it('does not change when seeded again, even at a later time', async () => {
		const tables = all<{ name: string }>(`SELECT name FROM sqlite_schema WHERE type = 'table'`).map(({ name }) => name);
		const content = () =>
			tables.map(
				(table) =>
					JSON.stringify(all(`SELECT * FROM "${table}" ORDER BY 1, 2 LIMIT 5000`)) +
					all(`SELECT count(*) FROM "${table}"`).map(String)
			);
		const [before, robots] = [content(), readFileSync(options.passwordsFile, 'utf8')];
		const { password } = await seed({ ...options, nowMs: options.nowMs + 9 * 86_400_000, password: undefined });
		expect(content()).toEqual(before);
		expect(readFileSync(options.passwordsFile, 'utf8')).toBe(robots);
		expect(password).toBe('a password for tests');
	});

	it('gives robots new passwords, and ends the old ones, only when theirs are lost', async () => {
		rmSync(options.passwordsFile);
		await seed({ ...options, password: undefined });
		const [count] = all<{ valid: number; revoked: number }>(
			'SELECT sum(revoked_at_ms IS NULL) valid, sum(revoked_at_ms IS NOT NULL) revoked FROM robot_credential'
		);
		expect(count).toEqual({ valid: 24, revoked: 24 });
	});
});
