/** A floor for a recording: the surveyed outline where there is one, else the extent of its tracks. */

import { existsSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { z } from 'zod';
import type { Floor, RobotModel } from '../../src/lib/domain/floor.ts';
import type { Bounds, Polygon } from '../../src/lib/domain/geometry/types.ts';
import { rect, type Venue } from '../venue/model.ts';
import type { Recording } from './parse.ts';

export const RECORDINGS: Venue = { key: 'recordings', name: 'Recordings', town: 'Various', timeZone: 'Etc/UTC' };

/** Looks down on the floor from a fixed place. */
export const OBSERVER: RobotModel = {
	key: 'observer',
	name: 'Fixed observer',
	letter: 'O',
	length: 0.2,
	width: 0.2,
	radius: 0.1,
	maxSpeed: 0.1
};
/** A robot that took part in the recording; its size is not in the data. */
export const RECORDED_ROBOT: RobotModel = {
	key: 'recorded',
	name: 'Recorded robot',
	letter: 'R',
	length: 0.5,
	width: 0.5,
	radius: 0.28,
	maxSpeed: 1
};

/** m kept around the tracks where nobody surveyed the floor. */
const PADDING = 0.5;

const Ring = z.array(z.tuple([z.number(), z.number()])).min(3);
const Entry = z.object({
	walkable: z.object({ outer: Ring, holes: z.array(Ring).default([]) }),
	measurement_area: Ring.optional()
});
const Geometry = z.record(z.string(), Entry);

export interface Survey {
	readonly walkable: Polygon;
	readonly measurementArea: readonly (readonly [number, number])[] | null;
}

/** What `geometry.json`, or else `voronoi_NAME.json`, beside the data says about a recording; null when neither says anything. */
export function readSurvey(file: string, name: string): Survey | null {
	const all = readJson(join(dirname(file), 'geometry.json'));
	const single = readJson(join(dirname(file), `voronoi_${name}.json`));
	const entry = Geometry.parse(all ?? {})[name] ?? (single === null ? null : Entry.parse(single));
	return entry ? { walkable: entry.walkable, measurementArea: entry.measurement_area ?? null } : null;
}

const readJson = (path: string): unknown => (existsSync(path) ? JSON.parse(readFileSync(path, 'utf8')) : null);

/** Extent of everything that moves in a recording, m. */
export function extentOf({ frames, robot }: Recording): Bounds {
	let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity];
	const take = ({ x, y }: { x: number; y: number }) => {
		minX = Math.min(minX, x);
		maxX = Math.max(maxX, x);
		minY = Math.min(minY, y);
		maxY = Math.max(maxY, y);
	};
	for (const { people } of frames) people.forEach(take);
	robot?.forEach(take);
	return { minX, minY, maxX, maxY };
}

/** Key of the floor: also the first part of its robots' keys. */
export const floorKeyOf = (name: string): string =>
	`recording-${name
		.toLowerCase()
		.replace(/[^a-z0-9.-]+/g, '-')
		.slice(0, 50)}`;

/** The floor with two robot maps: one in the recording's own frame and one turned and shifted, as a robot's would be. */
export function floorOf(recording: Recording, survey: Survey | null): Floor {
	const { minX, minY, maxX, maxY } = extentOf(recording);
	const outline = rect(minX - PADDING, minY - PADDING, maxX + PADDING, maxY + PADDING);
	const walkable = survey?.walkable ?? { outer: outline, holes: [] };
	const key = floorKeyOf(recording.name);
	const area = survey?.measurementArea;
	return {
		key,
		name: recording.name,
		walkable,
		walls: [],
		// Filmed from above: nothing on the floor hides anybody.
		edgesBlockSight: false,
		zones: [
			{
				key: area ? 'measurement-area' : 'whole-floor',
				name: area ? 'Measurement area' : 'Whole floor',
				polygon: { outer: area ?? walkable.outer, holes: [] },
				scheme: 'fruin_walkway',
				threshold: null,
				private: false
			}
		],
		waitingPlaces: [],
		maps: {
			[key]: { scale: 1, rotation: 0, tx: 0, ty: 0 },
			[`${key}-turned`]: { scale: 1, rotation: 0.7, tx: 3.2, ty: -11.6 }
		}
	};
}
