/** Reads recorded people tracks, recorded robots and robots' views. Nothing is smoothed, resampled or filled in. */

import { readFileSync } from 'node:fs';
import { basename } from 'node:path';
import { gunzipSync } from 'node:zlib';
import { z } from 'zod';
import { Failure } from '../../src/lib/domain/failure.ts';

export interface RecordedPerson {
	readonly id: string;
	/** m, the recording's own frame */
	readonly x: number;
	readonly y: number;
	/** m/s; null where the recording has none */
	readonly vx: number | null;
	readonly vy: number | null;
}

/** Everybody listed at one recorded instant. An instant with nobody listed is not in the file and not here. */
export interface RecordedFrame {
	/** s from the start of the recording */
	readonly time: number;
	readonly people: readonly RecordedPerson[];
}

export interface RecordedPose {
	readonly time: number;
	readonly x: number;
	readonly y: number;
	/** rad; null where the recording has none */
	readonly heading: number | null;
	/** Number of the take */
	readonly run: number;
}

export interface Recording {
	/** File name without folder and endings */
	readonly name: string;
	readonly frames: readonly RecordedFrame[];
	/** The recorded robot's own track; null for recordings without one */
	readonly robot: readonly RecordedPose[] | null;
}

/** `NAME.csv.gz`, `NAME.robot.csv.gz`, `NAME.jsonl.gz`, or the same without `.gz`. @throws Failure 'bad_input' with file and line */
export function readRecording(file: string): Recording {
	const name = basename(file).replace(/(\.robot)?\.(csv|jsonl)(\.gz)?$/, '');
	const text = readText(file);
	if (/\.jsonl(\.gz)?$/.test(file)) return { name, ...parseRobotView(text, file) };
	if (/\.robot\.csv(\.gz)?$/.test(file)) {
		const people = file.replace('.robot.csv', '.csv');
		return { name, frames: parsePeople(readText(people), people), robot: parseRobot(text, file) };
	}
	if (!/\.csv(\.gz)?$/.test(file))
		throw new Failure('bad_input', `${file}: only .csv, .csv.gz, .jsonl and .jsonl.gz can be replayed.`);
	return { name, frames: parsePeople(text, file), robot: null };
}

function readText(file: string): string {
	try {
		const bytes = readFileSync(file);
		return (file.endsWith('.gz') ? gunzipSync(bytes) : bytes).toString('utf8');
	} catch (cause) {
		throw new Failure('bad_input', `${file} cannot be read: ${(cause as Error).message}`, undefined, { cause });
	}
}

/** People as `t_s,id,x_m,y_m`, one line per person and instant, sorted by time. */
export function parsePeople(text: string, file = 'people'): RecordedFrame[] {
	const frames: { time: number; people: RecordedPerson[] }[] = [];
	for (const [line, cells] of rows(text, ['t_s', 'id', 'x_m', 'y_m'], file)) {
		const [time, x, y] = [0, 2, 3].map((i) => readNumber(cells[i], file, line)) as [number, number, number];
		const last = frames.at(-1);
		if (last && time < last.time) throw new Failure('bad_input', `${file}, line ${line}: time runs backwards.`);
		const person = { id: cells[1]!, x, y, vx: null, vy: null };
		if (last && last.time === time) last.people.push(person);
		else frames.push({ time, people: [person] });
	}
	return frames;
}

/** A robot as `t_s,x_m,y_m,yaw_rad,run`; the yaw may be empty. */
export function parseRobot(text: string, file = 'robot'): RecordedPose[] {
	return rows(text, ['t_s', 'x_m', 'y_m', 'yaw_rad', 'run'], file).map(([line, cells]) => ({
		time: readNumber(cells[0], file, line),
		x: readNumber(cells[1], file, line),
		y: readNumber(cells[2], file, line),
		heading: cells[3] === '' ? null : readNumber(cells[3], file, line),
		run: readNumber(cells[4], file, line)
	}));
}

const View = z.object({
	t: z.number(),
	robot: z.object({ x: z.number(), y: z.number(), heading: z.number(), v: z.number().optional() }),
	people: z.array(
		z.object({
			id: z.union([z.string(), z.number()]).transform(String),
			x: z.number(),
			y: z.number(),
			vx: z.number().nullish(),
			vy: z.number().nullish()
		})
	)
});

/** One header line (kept by nobody), then one JSON object per instant: what a robot saw and where it was. */
export function parseRobotView(text: string, file = 'view'): Pick<Recording, 'frames' | 'robot'> {
	const frames: RecordedFrame[] = [];
	const robot: RecordedPose[] = [];
	text.split(/\r?\n/).forEach((line, i) => {
		if (i === 0 || line.trim() === '') return;
		const { t, robot: at, people } = readView(line, file, i + 1);
		frames.push({ time: t, people: people.map((p) => ({ ...p, vx: p.vx ?? null, vy: p.vy ?? null })) });
		robot.push({ time: t, x: at.x, y: at.y, heading: at.heading, run: 1 });
	});
	return { frames, robot };
}

function readView(line: string, file: string, number: number): z.infer<typeof View> {
	try {
		return View.parse(JSON.parse(line));
	} catch (cause) {
		throw new Failure('bad_input', `${file}, line ${number}: not a robot's view.`, undefined, { cause });
	}
}

/** Lines below the header as cells, with their line numbers. Columns must be the ones named, in that order. */
function rows(text: string, columns: readonly string[], file: string): [line: number, cells: string[]][] {
	const [head = '', ...lines] = text.split(/\r?\n/);
	if (head.trim() !== columns.join(',')) {
		throw new Failure(
			'bad_input',
			`${file}: the first line must be "${columns.join(',')}", not "${head.slice(0, 60)}".`
		);
	}
	return lines.flatMap((line, i): [number, string[]][] => {
		if (line === '') return [];
		const cells = line.split(',');
		if (cells.length !== columns.length)
			throw new Failure('bad_input', `${file}, line ${i + 2}: ${cells.length} columns.`);
		return [[i + 2, cells]];
	});
}

function readNumber(cell: string | undefined, file: string, line: number): number {
	const value = cell === undefined || cell === '' ? NaN : Number(cell);
	if (!Number.isFinite(value)) throw new Failure('bad_input', `${file}, line ${line}: "${cell}" is no number.`);
	return value;
}
