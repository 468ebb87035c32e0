import { gzipSync } from 'node:zlib';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { People, Pose, State } from '../../src/lib/contracts/mqtt.ts';
import { applySimilarity } from '../../src/lib/domain/geometry/similarity.ts';
import { floorOf, readSurvey } from './floor.ts';
import { observersOf, timelineOf, type Observer, type Timed } from './observers.ts';
import { parsePeople, parseRobot, parseRobotView, readRecording, type Recording } from './parse.ts';

const PEOPLE = `t_s,id,x_m,y_m
0.000,1,0.000,0.000
0.000,2,9.500,3.000
0.400,1,0.480,0.010
2.000,2,8.125,-1.375
`;
const ROBOT = `t_s,x_m,y_m,yaw_rad,run
0.000,1.000,1.000,0.5,1
0.400,1.400,1.000,,1
2.000,5.000,1.000,,2
`;
const VIEW = `{"name":"view","note":"header"}
{"t":0,"robot":{"x":1,"y":2,"heading":0.3,"v":0.5},"people":[{"id":7,"x":3,"y":2,"vx":-1,"vy":0}]}

{"t":0.1,"robot":{"x":1.05,"y":2,"heading":0.3},"people":[]}
`;

const folder = mkdtempSync(join(tmpdir(), 'recordings-'));
afterAll(() => rmSync(folder, { recursive: true }));
const write = (name: string, text: string) => {
	const file = join(folder, name);
	writeFileSync(file, name.endsWith('.gz') ? gzipSync(text) : text);
	return file;
};

describe('reading', () => {
	it('groups people by recorded instant and fills in nothing', () => {
		const frames = parsePeople(PEOPLE);
		expect(frames.map(({ time, people }) => [time, people.length])).toEqual([
			[0, 2],
			[0.4, 1],
			[2, 1]
		]);
		expect(frames[0]!.people[1]).toEqual({ id: '2', x: 9.5, y: 3, vx: null, vy: null });
	});

	it('takes an empty yaw for not recorded, not for zero', () => {
		expect(parseRobot(ROBOT).map(({ heading }) => heading)).toEqual([0.5, null, null]);
	});

	it('reads a robot’s view below its header line, empty looks included', () => {
		const { frames, robot } = parseRobotView(VIEW);
		expect(frames.map(({ people }) => people.length)).toEqual([1, 0]);
		expect(robot![0]).toMatchObject({ x: 1, y: 2, heading: 0.3 });
	});

	it('reads packed files, and a robot’s people beside it', () => {
		write('walk.csv.gz', PEOPLE);
		const recording = readRecording(write('walk.robot.csv.gz', ROBOT));
		expect(recording.name).toBe('walk');
		expect(recording.frames).toHaveLength(3);
		expect(recording.robot).toHaveLength(3);
	});

	it.each([
		['a wrong header', 'time,id,x,y\n0,1,0,0\n', /first line/],
		['a missing column', 't_s,id,x_m,y_m\n0,1,0\n', /line 2: 3 columns/],
		['a word for a number', 't_s,id,x_m,y_m\n0,1,left,0\n', /line 2: "left" is no number/],
		['an empty number, which is not zero', 't_s,id,x_m,y_m\n0,1,,0\n', /no number/],
		['time running backwards', 't_s,id,x_m,y_m\n1,1,0,0\n0,1,0,0\n', /line 3: time runs backwards/]
	])('refuses %s and says where', (_what, text, message) => {
		expect(() => parsePeople(text)).toThrow(message);
	});

	it('refuses other files and damaged views', () => {
		expect(() => readRecording(write('walk.txt', PEOPLE))).toThrow(/can be replayed/);
		expect(() => readRecording(join(folder, 'nowhere.csv.gz'))).toThrow(/cannot be read/);
		expect(() => parseRobotView('{}\n{"t":1}')).toThrow(/line 2/);
	});
});

describe('the floor of a recording', () => {
	const recording: Recording = { name: 'Walk 1', frames: parsePeople(PEOPLE), robot: null };

	it('is the extent of the tracks padded by 0.5 m where nobody surveyed it, and hides nobody', () => {
		const floor = floorOf(recording, null);
		expect(floor.walkable.outer).toEqual([
			[-0.5, -1.875],
			[10, -1.875],
			[10, 3.5],
			[-0.5, 3.5]
		]);
		expect(floor.edgesBlockSight).toBe(false);
		expect(floor.key).toBe('recording-walk-1');
	});

	it('is the surveyed outline with its measurement area where there is one', () => {
		const square = [
			[0, 0],
			[5, 0],
			[5, 5]
		];
		const file = write(
			'geometry.json',
			JSON.stringify({ lab: { walkable: { outer: square }, measurement_area: square } })
		);
		const floor = floorOf({ ...recording, name: 'lab' }, readSurvey(file, 'lab'));
		expect(floor.walkable).toEqual({ outer: square, holes: [] });
		expect(floor.zones[0]).toMatchObject({ key: 'measurement-area', polygon: { outer: square } });
		expect(readSurvey(file, 'other')).toBeNull();
	});
});

describe('what observers send', () => {
	const recording: Recording = { name: 'walk', frames: parsePeople(PEOPLE), robot: null };
	const floor = floorOf(recording, null);
	const looks = (observer: Observer) =>
		timelineOf(recording, observer).filter(
			(timed): timed is Extract<Timed, { channel: 'people' }> => timed.channel === 'people'
		);

	it('is one people message per recorded instant, at that instant: the time grid is kept', () => {
		const [observer] = observersOf(recording, floor, 1, false);
		expect(looks(observer!).map(({ at, message }) => [at, message.persons.length])).toEqual([
			[0, 2],
			[0.4, 1],
			[2, 1]
		]);
	});

	it('is exact to the printed decimals, also through a turned map', () => {
		for (const turned of [false, true]) {
			const [observer] = observersOf(recording, floor, 1, turned);
			const { message } = looks(observer!)[0]!;
			const { x, y } = applySimilarity(floor.maps[message.map]!, message.persons[1]!.x, message.persons[1]!.y);
			expect(x).toBeCloseTo(9.5, 5);
			expect(y).toBeCloseTo(3, 5);
			expect(message.persons[1]).not.toHaveProperty('vx');
		}
	});

	it('shares the view among several observers: everybody is seen, some twice, nobody beyond range', () => {
		const spread = Array.from(
			{ length: 60 },
			(_, i) => `0.000,${i},${(i * 0.5).toFixed(3)},${((i * 7) % 5).toFixed(3)}`
		);
		const wide: Recording = {
			name: 'wide',
			frames: parsePeople(['t_s,id,x_m,y_m', ...spread].join('\n')),
			robot: null
		};
		const observers = observersOf(wide, floorOf(wide, null), 3, false);
		const seen = observers.map((observer) =>
			timelineOf(wide, observer).flatMap((t) => (t.channel === 'people' ? t.message.persons : []))
		);
		expect(new Set(seen.flat().map(({ id }) => id)).size).toBe(60);
		expect(seen.flat().length).toBeGreaterThan(60);
		for (const persons of seen) expect(persons.length).toBeLessThan(60);
	});

	it('follows the contract, for a recorded robot as for a standing observer', () => {
		const moving: Recording = { ...recording, robot: parseRobot(ROBOT) };
		for (const what of [recording, moving]) {
			for (const { channel, message } of timelineOf(what, observersOf(what, floor, 1, true)[0]!)) {
				const schema = { people: People, pose: Pose, state: State }[channel];
				expect(schema.safeParse({ t: 1_700_000_000_000, seq: 0, ...message }).error?.issues ?? []).toEqual([]);
			}
		}
	});

	it('takes no step from one take to the next for driving', () => {
		const moving: Recording = { ...recording, robot: parseRobot(ROBOT) };
		const poses = timelineOf(moving, observersOf(moving, floor, 1, false)[0]!).filter((t) => t.channel === 'pose');
		expect(poses.map(({ message }) => (message as { speed: number }).speed)).toEqual([0, 1, 0]);
	});
});
