import { describe, expect, it } from 'vitest';
import fc from 'fast-check';
import { DEFAULT_HALT_RULE, HALT_RULE_RANGES, type HaltRule } from './halt-rule.ts';
import {
	restoreHalt,
	startHaltState,
	stepHalt,
	type HaltEvent,
	type HaltState,
	type RobotSample
} from './halt-detector.ts';
import { remainingAlong } from './progress.ts';

const GOAL = { x: 100, y: 0 };
const BASE: Omit<RobotSample, 'time' | 'pose' | 'remaining'> = {
	taskId: 'task-1',
	tasked: true,
	automatic: true,
	paused: false,
	charging: false,
	estop: false,
	localized: true,
	blockingError: null,
	link: 'online',
	atWaitingPlace: false,
	nearGoal: false,
	nearestPerson: null,
	roomAlone: null,
	roomLimitedByPeople: null
};

type Changes = Partial<RobotSample> & { at?: { x: number; y: number }; missing?: boolean };

/** Feeds samples at `rate` per second from 0 to `seconds`; `scene` says where the robot is and what is different. */
function run(
	seconds: number,
	scene: (time: number) => Changes,
	{ rate = 10, rule = DEFAULT_HALT_RULE, from = 0 } = {}
) {
	let state: HaltState = startHaltState();
	let pose: RobotSample['pose'] = null;
	const events: HaltEvent[] = [];
	for (let i = Math.round(from * rate); i <= seconds * rate; i++) {
		const time = i / rate;
		const { at, missing, ...changes } = scene(time);
		if (at && !missing) pose = { ...at, heading: 0, speed: 0, time };
		const remaining = pose ? remainingAlong([], GOAL, pose.x, pose.y) : null;
		const step = stepHalt(state, { ...BASE, time, pose, remaining, ...changes }, rule);
		state = step.state;
		if (step.event) events.push(step.event);
	}
	return { events, state };
}

/** Drives along x at `speed` until `stop`, then stands. */
const driveUntil =
	(stop: number, speed = 1) =>
	(time: number) => ({ at: { x: speed * Math.min(time, stop), y: 0 } });
const noise = (i: number, sd: number) => sd * 1.4 * (Math.sin(i * 12.9898) + Math.sin(i * 78.233 + 1)) * 0.7;

describe('a stop', () => {
	it('is a halt dated back to when progress stopped, and noticed within ten seconds', () => {
		const { events } = run(40, driveUntil(20));
		expect(events).toHaveLength(1);
		const [event] = events;
		if (event?.type !== 'started') throw new Error('no halt');
		expect(event.kind).toBe('stall');
		expect(Math.abs(event.onset - 20)).toBeLessThanOrEqual(0.5);
		expect(event.detectedAt - 20).toBeLessThanOrEqual(10);
	});

	it('is dated within 0.5 s on clean poses at 10 Hz, whatever the speed and the time', () => {
		const speeds = fc.double({ min: 0.15, max: 2, noNaN: true });
		fc.assert(
			fc.property(speeds, fc.double({ min: 0, max: 30, noNaN: true }), (speed, stop) => {
				const { events } = run(stop + 12, driveUntil(stop, speed));
				expect(events).toHaveLength(1);
				expect(events[0]).toMatchObject({ type: 'started' });
				expect(Math.abs((events[0] as { onset: number }).onset - stop)).toBeLessThanOrEqual(0.5);
			}),
			{ numRuns: 60 }
		);
	});

	it('is found at 2 Hz as at 10 Hz', () => {
		const { events } = run(40, driveUntil(20), { rate: 2 });
		expect(events).toMatchObject([{ type: 'started', kind: 'stall' }]);
		expect(Math.abs((events[0] as { onset: number }).onset - 20)).toBeLessThanOrEqual(1);
	});

	it('with braking is dated to the end of the braking', () => {
		const braking = (time: number) => {
			const into = Math.min(Math.max(time - 20, 0), 2);
			return { at: { x: Math.min(time, 20) + into - into ** 2 / 4, y: 0 } };
		};
		const { events } = run(40, braking);
		expect(Math.abs((events[0] as { onset: number }).onset - 22)).toBeLessThanOrEqual(0.5);
	});

	it('never happens while the robot gets on at twice the least rate or more', () => {
		const speeds = fc.double({ min: 0.1, max: 2, noNaN: true });
		fc.assert(
			fc.property(speeds, (speed) => {
				expect(run(30, driveUntil(1e9, speed)).events).toEqual([]);
			}),
			{ numRuns: 20 }
		);
	});

	it('ends with 0.6 m of progress in 4 s, not with less', () => {
		const creep = (time: number) => ({
			at: { x: Math.min(time, 10) + 0.1 * Math.max(0, Math.min(time, 35) - 30), y: 0 }
		});
		expect(run(45, creep).events.map((event) => event.type)).toEqual(['started']);
		const resume = (time: number) => ({ at: { x: Math.min(time, 10) + 0.5 * Math.max(0, time - 30), y: 0 } });
		const { events } = run(45, resume);
		expect(events).toMatchObject([{ type: 'started' }, { type: 'ended', reason: 'progress' }]);
		expect((events[1] as { at: number }).at).toBeCloseTo(31.2, 1);
	});

	it('after an earlier one is not dated back into it', () => {
		const twice = (time: number) => ({
			at: { x: Math.min(time, 10) + 0.35 * Math.max(0, Math.min(time, 32) - 30), y: 0 }
		});
		const { events } = run(60, twice);
		expect(events.map((event) => event.type)).toEqual(['started', 'ended', 'started']);
		expect((events[2] as { onset: number }).onset).toBeGreaterThan(31);
	});
});

describe('kinds', () => {
	const withPerson =
		(from: number, to: number, distance = 2) =>
		(time: number) => ({
			...driveUntil(20)(time),
			nearestPerson: time >= from && time <= to ? distance : null
		});

	it('calls it a freeze when a person was within 3 m in the 2 s before onset', () => {
		expect(run(30, withPerson(18.5, 19.5)).events).toMatchObject([{ kind: 'freeze' }]);
		expect(run(30, withPerson(10, 17)).events).toMatchObject([{ kind: 'stall' }]);
		expect(run(30, withPerson(18.5, 19.5, 3.2)).events).toMatchObject([{ kind: 'stall' }]);
	});

	it('calls it a freeze when people left no room, a stall when walls did', () => {
		const packed = (byPeople: boolean) => (time: number) => ({
			...driveUntil(20)(time),
			nearestPerson: 3.5,
			roomAlone: time > 18 ? 0.1 : 1,
			roomLimitedByPeople: byPeople
		});
		expect(run(30, packed(true)).events).toMatchObject([{ kind: 'freeze' }]);
		expect(run(30, packed(false)).events).toMatchObject([{ kind: 'stall' }]);
	});

	it('trap: room is taken just before onset, not when the halt was noticed and people have closed in', () => {
		const later = (time: number) => ({
			...driveUntil(20)(time),
			roomAlone: time > 21 ? 0 : 1,
			roomLimitedByPeople: true
		});
		expect(run(30, later).events).toMatchObject([{ kind: 'stall' }]);
		const drained = (time: number) => ({
			...driveUntil(20)(time),
			roomAlone: time > 19 && time < 21 ? 0 : 1,
			roomLimitedByPeople: true
		});
		expect(run(30, drained).events).toMatchObject([{ kind: 'freeze' }]);
	});

	it('trap: a person who walks up to a standing robot did not stop it', () => {
		expect(run(30, withPerson(20.8, 40)).events).toMatchObject([{ kind: 'stall' }]);
	});

	it('calls to-and-fro without advance a dither, and ends it only beyond the farthest point', () => {
		const swing = (time: number) => {
			const into = Math.max(0, Math.min(time, 41) - 20);
			const beyond = 0.8 * Math.max(0, time - 41);
			return {
				at: { x: Math.min(time, 20) - Math.abs(((into + 1.5) % 3) - 1.5) * 0.8 + beyond, y: 0 },
				nearestPerson: 1
			};
		};
		const { events } = run(50, swing);
		expect(events).toMatchObject([
			{ type: 'started', kind: 'dither' },
			{ type: 'ended', reason: 'progress' }
		]);
		expect((events[0] as { onset: number }).onset).toBeLessThan(21);
		expect((events[1] as { at: number }).at).toBeGreaterThan(41);
	});

	it('trap: backing off and coming back to the same people is not getting on', () => {
		const rocking = (time: number) => {
			const back = Math.min(Math.max(0, time - 40) * 0.4, 1) - Math.min(Math.max(0, time - 43) * 0.5, 1);
			return { at: { x: Math.min(time, 20) - back + 0.8 * Math.max(0, time - 60), y: 0 }, nearestPerson: 1 };
		};
		const { events } = run(70, rocking);
		expect(events).toMatchObject([
			{ type: 'started', kind: 'freeze' },
			{ type: 'ended', reason: 'progress' }
		]);
		expect((events[1] as { at: number }).at).toBeGreaterThan(60);
	});

	it('ends elsewhere too: a robot that turned back and drives another way has got on', () => {
		const detour = (time: number) => {
			const back = Math.min(Math.max(0, time - 40), 4);
			const on = Math.max(0, time - 44);
			return { at: { x: Math.min(time, 20) - back + on, y: Math.min(on, 3) }, nearestPerson: 1 };
		};
		const { events } = run(60, detour);
		expect(events).toMatchObject([{ type: 'started' }, { type: 'ended', reason: 'progress' }]);
		expect((events[1] as { at: number }).at).toBeLessThan(48);
	});

	it('trap: localisation jitter of a standing robot is not driving (no dither), and does not blur the onset', () => {
		const jitter = (time: number) => {
			const i = Math.round(time * 10);
			return { at: { x: Math.min(time, 20) + noise(i, 0.02), y: noise(i + 5000, 0.02) } };
		};
		const { events } = run(60, jitter);
		expect(events).toMatchObject([{ type: 'started', kind: 'stall' }]);
		expect(Math.abs((events[0] as { onset: number }).onset - 20)).toBeLessThanOrEqual(1);
	});
});

describe('what is not a halt', () => {
	it('yielding for less than 4 s, even of a slow robot', () => {
		const speeds = fc.double({ min: 0.2, max: 1.5, noNaN: true });
		fc.assert(
			fc.property(speeds, fc.double({ min: 0.5, max: 3.9, noNaN: true }), (speed, wait) => {
				const yields = (time: number) => ({
					at: { x: speed * (Math.min(time, 10) + Math.max(0, time - 10 - wait)), y: 0 }
				});
				expect(run(30, yields).events).toEqual([]);
			}),
			{ numRuns: 30 }
		);
		const quick: HaltRule = { ...DEFAULT_HALT_RULE, windowS: 2, holdS: 0, minProgressM: 0.1 };
		const yields = (time: number) => ({ at: { x: Math.min(time, 10) + Math.max(0, time - 13.5), y: 0 } });
		expect(run(20, yields, { rule: quick }).events).toEqual([]);
		expect(run(20, yields, { rule: { ...quick, plannedYieldS: 0 } }).events).toHaveLength(2);
	});

	it.each([
		['paused', { paused: true }],
		['charging', { charging: true }],
		['in manual mode', { automatic: false }],
		['at a waiting place', { atWaitingPlace: true }],
		['near the goal', { nearGoal: true }],
		['without a task', { tasked: false, taskId: null }]
	])('trap: standing %s', (_, changes) => {
		expect(run(60, (time) => ({ ...driveUntil(20)(time), ...(time > 20.5 ? changes : {}) })).events).toEqual([]);
	});

	it('the first seconds after leaving a planned stop: the window starts anew', () => {
		const { events } = run(60, (time) => ({ ...driveUntil(20)(time), atWaitingPlace: time > 20.5 && time < 40 }));
		expect(events).toMatchObject([{ type: 'started' }]);
		expect((events[0] as { onset: number }).onset).toBeGreaterThanOrEqual(39.8);
		expect((events[0] as { detectedAt: number }).detectedAt).toBeGreaterThanOrEqual(45.9);
	});

	it('a new task with a goal farther away', () => {
		const scene = (time: number) => {
			const x = Math.min(time, 20) - Math.max(0, time - 20);
			return { at: { x, y: 0 }, taskId: time < 20 ? 'task-1' : 'task-2', remaining: time < 20 ? 100 - x : 200 + x };
		};
		expect(run(40, scene).events).toEqual([]);
	});

	it('another, longer route for the same task', () => {
		const scene = (time: number) => ({ at: { x: time, y: 0 }, remaining: (time < 20 ? 100 : 130) - time });
		expect(run(40, scene).events).toEqual([]);
	});

	it('a gap in the poses across which the robot moved: no data is not "no progress"', () => {
		const scene = (time: number) => ({ ...driveUntil(1e9)(time), missing: time % 5 > 2.8, remaining: null });
		expect(run(60, scene).events).toEqual([]);
	});
});

it('finds the halt of a robot that switches to and fro between two routes', () => {
	const scene = (time: number) => {
		const into = Math.max(0, time - 20);
		const left = into % 4 < 2;
		const x = Math.min(time, 20);
		const y = left ? (into % 2) * 0.1 : 0.2 - (into % 2) * 0.1;
		return { at: { x, y }, remaining: (left ? 120 - y : 125 + y) - x };
	};
	expect(run(60, scene).events[0]).toMatchObject({ type: 'started' });
});

it('finds the halt of a tasked robot whose goal is not known', () => {
	const { events } = run(40, (time) => ({ ...driveUntil(20)(time), remaining: null }));
	expect(events).toMatchObject([{ type: 'started', kind: 'stall' }]);
	expect(Math.abs((events[0] as { onset: number }).onset - 20)).toBeLessThanOrEqual(0.5);
});

it('finds a halt across a gap in the poses when the robot still stands where it stood', () => {
	const { events } = run(40, (time) => ({ ...driveUntil(20)(time), missing: time > 22 && time < 24.5 }));
	expect(events).toMatchObject([{ type: 'started', kind: 'stall' }]);
});

describe('fault', () => {
	it.each([
		['e-stop', { estop: true }],
		['lost localisation', { localized: false }],
		['blocking error', { blockingError: 'wheel-blocked' }]
	])('is raised at once by %s, with the first report as onset', (_, changes) => {
		const { events } = run(21, (time) => ({ ...driveUntil(20)(time), ...(time >= 20 ? changes : {}) }));
		expect(events).toEqual([{ type: 'started', kind: 'fault', onset: 20, detectedAt: 20 }]);
	});

	it('needs a task', () => {
		expect(run(20, () => ({ at: { x: 0, y: 0 }, tasked: false, estop: true })).events).toEqual([]);
	});

	it('lasts until the robot gets on again, so that a flickering report is one halt', () => {
		const flicker = (time: number) => ({
			at: { x: Math.min(time, 20) + Math.max(0, time - 40), y: 0 },
			localized: !(time > 20 && time < 30 && Math.floor(time) % 2 === 0)
		});
		expect(run(45, flicker).events).toMatchObject([
			{ type: 'started', kind: 'fault' },
			{ type: 'ended', reason: 'progress' }
		]);
	});

	it('takes over from a freeze, gives way to silence, and comes back', () => {
		const scene = (time: number) => ({
			...driveUntil(20)(time),
			nearestPerson: 1,
			estop: time >= 35,
			missing: time > 40 && time < 50
		});
		expect(run(55, scene).events).toMatchObject([
			{ type: 'started', kind: 'freeze' },
			{ type: 'changed', kind: 'fault' },
			{ type: 'changed', kind: 'silent' },
			{ type: 'changed', kind: 'fault' }
		]);
	});
});

describe('silence', () => {
	it('is raised 3 s after the last pose while the link is up, with the last pose as onset', () => {
		const { events } = run(30, (time) => ({ ...driveUntil(1e9)(time), missing: time > 20 }));
		expect(events).toEqual([{ type: 'started', kind: 'silent', onset: 20, detectedAt: 23 }]);
	});

	it('is raised at once when the link is lost', () => {
		const lost = (time: number) => ({
			...driveUntil(1e9)(time),
			missing: time > 20,
			link: time >= 21.5 ? ('lost' as const) : ('online' as const)
		});
		expect(run(22, lost).events).toEqual([{ type: 'started', kind: 'silent', onset: 20, detectedAt: 21.5 }]);
	});

	it('is not raised by a late last will while poses keep coming', () => {
		const late = (time: number) => ({
			...driveUntil(1e9)(time),
			link: time > 20 ? ('lost' as const) : ('online' as const)
		});
		expect(run(30, late).events).toEqual([]);
	});

	it('is no halt of a robot without a task that said goodbye, but is one with a task', () => {
		const gone = (tasked: boolean) => (time: number) => ({
			...driveUntil(1e9)(time),
			missing: time > 20,
			link: time > 20 ? ('offline' as const) : ('online' as const),
			tasked
		});
		expect(run(60, gone(false)).events).toEqual([]);
		expect(run(60, gone(true)).events).toMatchObject([{ kind: 'silent', onset: 20 }]);
	});

	it('is raised for a tasked robot that is online and never sends a pose, not for one never heard of', () => {
		expect(run(10, () => ({}), { from: 1 }).events).toEqual([
			{ type: 'started', kind: 'silent', onset: 1, detectedAt: 4 }
		]);
		expect(run(10, () => ({ link: 'unknown' })).events).toEqual([]);
	});

	it('ends by progress when the robot drove on, and becomes a stall when it stands', () => {
		const back = (stop: number) => (time: number) => ({ ...driveUntil(stop)(time), missing: time > 20 && time < 30 });
		expect(run(40, back(1e9)).events).toMatchObject([{ kind: 'silent' }, { type: 'ended', reason: 'progress' }]);
		expect(run(45, back(20)).events).toMatchObject([{ kind: 'silent' }, { type: 'changed', kind: 'stall' }]);
	});

	it('goes back to the kind beneath it', () => {
		const scene = (time: number) => ({ ...driveUntil(20)(time), nearestPerson: 1, missing: time > 30 && time < 40 });
		expect(run(45, scene).events).toMatchObject([
			{ type: 'started', kind: 'freeze' },
			{ type: 'changed', kind: 'silent' },
			{ type: 'changed', kind: 'freeze' }
		]);
	});
});

it.each([
	['task_ended', { tasked: false, taskId: null }],
	['task_changed', { taskId: 'task-2' }],
	['manual', { automatic: false }],
	['charging', { charging: true }],
	['paused', { paused: true }],
	['planned', { atWaitingPlace: true }]
])('ends a halt and says why: %s', (reason, changes) => {
	const { events } = run(34, (time) => ({ ...driveUntil(20)(time), ...(time >= 33 ? changes : {}) }));
	expect(events).toMatchObject([{ type: 'started' }, { type: 'ended', reason, at: 33 }]);
});

it('goes on with a halt that was open before a restart of the desk, with its onset', () => {
	let state = restoreHalt({ kind: 'freeze', onset: 5, detectedAt: 12 });
	const events: HaltEvent[] = [];
	const feed = (changes: Partial<RobotSample>) => {
		const step = stepHalt(state, { ...BASE, time: 0, pose: null, remaining: null, ...changes }, DEFAULT_HALT_RULE);
		state = step.state;
		if (step.event) events.push(step.event);
	};
	feed({ time: 99, link: 'unknown', tasked: false, taskId: null });
	expect(state.open).toEqual({ kind: 'freeze', onset: 5, detectedAt: 12 });
	for (let i = 0; i <= 40; i++) {
		const x = 0.5 * Math.max(0, i - 20) * 0.1;
		feed({ time: 100 + i / 10, pose: { x, y: 0, heading: 0, speed: 0, time: 100 + i / 10 }, remaining: 50 - x });
	}
	expect(events).toMatchObject([{ type: 'ended', reason: 'progress' }]);
});

it('ignores samples older than the last one', () => {
	const { state } = run(19, driveUntil(1e9));
	const old = { ...BASE, time: 3, pose: null, remaining: null, estop: true };
	expect(stepHalt(state, old, DEFAULT_HALT_RULE)).toEqual({ state, event: null });
	expect(stepHalt(state, { ...old, time: NaN }, DEFAULT_HALT_RULE)).toEqual({ state, event: null });
});

it('keeps a bounded history even of a robot that sends at 100 Hz', () => {
	const { state } = run(120, driveUntil(60), { rate: 100 });
	expect(state.track!.points.length).toBeLessThanOrEqual(330);
	expect(state.people.length).toBeLessThanOrEqual(370);
});

it('has at most one halt open at a time and ends only what it started, whatever happens', () => {
	const moment = fc.record({
		speed: fc.constantFrom(0, 0, 0.5, -0.5),
		missing: fc.boolean(),
		estop: fc.boolean(),
		paused: fc.boolean(),
		tasked: fc.constantFrom(true, true, true, false),
		link: fc.constantFrom('online' as const, 'lost' as const, 'offline' as const)
	});
	fc.assert(
		fc.property(fc.array(moment, { maxLength: 12 }), (moments) => {
			let x = 0;
			const { events, state } = run(
				moments.length * 5,
				(time) => {
					const now = moments[Math.min(moments.length - 1, Math.floor(time / 5))];
					x += (now?.speed ?? 0) * 0.2;
					return { at: { x, y: 0 }, ...(now ? { ...now } : {}) } as Changes;
				},
				{ rate: 5 }
			);
			let isOpen = false;
			for (const event of events) {
				expect(event.type === 'started').toBe(!isOpen);
				if (event.type === 'started') expect(event.onset).toBeLessThanOrEqual(event.detectedAt);
				isOpen = event.type !== 'ended';
			}
			expect(state.open !== null).toBe(isOpen);
		})
	);
});

it('has defaults inside the permitted range of every setting', () => {
	for (const [name, { min, max }] of Object.entries(HALT_RULE_RANGES)) {
		const value = DEFAULT_HALT_RULE[name as keyof HaltRule];
		expect(value).toBeGreaterThanOrEqual(min);
		expect(value).toBeLessThanOrEqual(max);
	}
	expect(Object.keys(HALT_RULE_RANGES).sort()).toEqual(Object.keys(DEFAULT_HALT_RULE).sort());
});
