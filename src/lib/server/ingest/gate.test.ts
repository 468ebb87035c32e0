import fc from 'fast-check';
import { beforeEach, describe, expect, it } from 'vitest';
import { MAX_PAYLOAD_BYTES } from '../../contracts/mqtt.ts';
import { createGate, type Gate } from './gate.ts';

const T = 1_800_000_000_000;
const OWN = 'elbowroom/v1/saltmarsh/porter-01';

const POSE = { t: T, seq: 1, map: 'ground', x: 1.5, y: -2, heading: 0.5, speed: 0.8 };
const PEOPLE = {
	t: T,
	seq: 1,
	map: 'ground',
	range_m: 8,
	persons: [
		{ id: 7, x: 1, y: 2 },
		{ id: 'b', x: 3, y: 4, vx: 0.1, vy: -0.2, sd: 0.05 }
	]
};
const STATE = {
	t: T,
	seq: 1,
	tasked: true,
	task: {
		id: 'task-1',
		goal: { x: 10, y: 5 },
		route: [
			[1, 1],
			[10, 5]
		]
	},
	mode: 'automatic',
	paused: false,
	estop: false,
	charging: false,
	battery: 0.75,
	localized: true,
	errors: [],
	software: '4.2.0'
};
const CONNECTION = { t: T, status: 'online' };
const ANSWER = { id: 'c1', status: 'done' };
const VALID = { pose: POSE, people: PEOPLE, state: STATE, connection: CONNECTION, answer: ANSWER };

/** A copy with `more` added to every object in it. */
function addEverywhere(value: unknown, more: object): unknown {
	if (Array.isArray(value)) return value.map((item) => addEverywhere(item, more));
	if (value === null || typeof value !== 'object') return value;
	const entries = Object.entries(value).map(([key, item]) => [key, addEverywhere(item, more)] as const);
	return { ...more, ...Object.fromEntries(entries) };
}

let gate: Gate;
beforeEach(() => {
	gate = createGate({ robots: (venue, robot) => venue === 'saltmarsh' && robot === 'porter-01' });
});

const send = (topic: string, body: unknown, retained = false) =>
	gate.accept(
		topic,
		Buffer.isBuffer(body) ? body : Buffer.from(typeof body === 'string' ? body : JSON.stringify(body)),
		retained,
		T + 40
	);

/** The reason a pose with this body is refused; 'accepted' when it is not. */
const reason = (body: unknown, topic = `${OWN}/pose`) => {
	const admission = send(topic, body);
	return admission.ok ? 'accepted' : admission.rejection.reason;
};

describe('a good message', () => {
	it('becomes a pose in seconds, with both clocks', () => {
		expect(send(`${OWN}/pose`, POSE)).toEqual({
			ok: true,
			kind: 'observation',
			venue: 'saltmarsh',
			observation: {
				kind: 'pose',
				robot: 'porter-01',
				receivedAt: T / 1000 + 0.04,
				robotTime: T / 1000,
				retained: false,
				map: 'ground',
				x: 1.5,
				y: -2,
				heading: 0.5,
				speed: 0.8
			},
			sequence: { seq: 1, verdict: 'first' }
		});
	});

	it('keeps "not said" apart from zero', () => {
		const admission = send(`${OWN}/people`, PEOPLE);
		expect(admission).toMatchObject({
			observation: {
				fieldOfView: null,
				blocked: null,
				persons: [
					{ id: '7', vx: null, vy: null, sd: null },
					{ id: 'b', vx: 0.1, vy: -0.2, sd: 0.05 }
				]
			}
		});
	});

	it('takes an empty list of persons as information', () => {
		expect(send(`${OWN}/people`, { ...PEOPLE, persons: [] })).toMatchObject({ ok: true, observation: { persons: [] } });
	});

	it('becomes a state, with or without a task', () => {
		expect(send(`${OWN}/state`, STATE)).toMatchObject({
			observation: {
				task: {
					id: 'task-1',
					route: [
						{ x: 1, y: 1 },
						{ x: 10, y: 5 }
					]
				}
			}
		});
		const { task: _task, ...idle } = STATE;
		expect(send(`${OWN}/state`, { ...idle, seq: 2, tasked: false })).toMatchObject({ observation: { task: null } });
	});

	it('becomes a connection, which has no number', () => {
		expect(send(`${OWN}/connection`, CONNECTION, true)).toMatchObject({
			observation: { kind: 'connection', status: 'online', retained: true },
			sequence: null
		});
	});

	it('becomes an answer', () => {
		expect(send(`${OWN}/answer`, ANSWER)).toEqual({
			ok: true,
			kind: 'answer',
			venue: 'saltmarsh',
			robot: 'porter-01',
			answer: ANSWER,
			receivedAt: T / 1000 + 0.04
		});
	});

	it('may start with a byte order mark', () => {
		expect(reason(`\ufeff${JSON.stringify(POSE)}`)).toBe('accepted');
	});

	it('may say more than we know, and none of it gets in', () => {
		const more = { colour: 'red', nested: { deep: [1] } };
		const plain = createGate({ robots: () => true });
		for (const channel of ['pose', 'people', 'state', 'connection', 'answer'] as const) {
			const topic = `${OWN}/${channel}`;
			const expected = plain.accept(topic, Buffer.from(JSON.stringify(VALID[channel])), false, T + 40);
			expect(send(topic, addEverywhere(VALID[channel], more))).toEqual(expected);
		}
	});
});

describe('a message is refused', () => {
	it('in the order size, topic, robot, JSON, contract, sequence', () => {
		const large = Buffer.alloc(MAX_PAYLOAD_BYTES + 1, 0x20);
		const stranger = 'elbowroom/v1/saltmarsh/nobody/pose';
		expect(reason(large, 'nowhere')).toBe('too_large');
		expect(reason('{', 'nowhere')).toBe('unknown_topic');
		expect(reason('{', `${OWN}/colour`)).toBe('unknown_topic');
		expect(reason('{', stranger)).toBe('unknown_robot');
		expect(reason('{', 'elbowroom/v1/other/porter-01/pose')).toBe('unknown_robot');
		expect(reason('{')).toBe('invalid_json');
		expect(reason('{}')).toBe('schema');
		expect(reason(POSE)).toBe('accepted');
		expect(reason(POSE)).toBe('out_of_order');
	});

	it('with the robot named only when we know it', () => {
		const robot = (topic: string) => {
			const admission = send(topic, '{');
			return admission.ok ? undefined : admission.rejection.robot;
		};
		expect(robot(`${OWN}/pose`)).toBe('porter-01');
		expect(robot(`${OWN}/colour`)).toBe('porter-01');
		expect(robot('elbowroom/v1/saltmarsh/nobody/pose')).toBeNull();
	});

	it('with the field and what is wrong with it, in words', () => {
		const admission = send(`${OWN}/people`, { ...PEOPLE, persons: [{ id: 1, x: 'east', y: 0 }] });
		expect(admission).toMatchObject({
			rejection: { reason: 'schema', detail: expect.stringMatching(/^persons\[0\]\.x: /) as string }
		});
	});

	it('with a detail that stays short, however much is wrong', () => {
		const persons = Array.from({ length: 1000 }, () => ({ id: null }));
		const admission = send(`${OWN}/people`, { ...PEOPLE, persons });
		expect(admission.ok ? '' : admission.rejection.detail).toMatch(/and \d+ more$/);
		const longTopic = send(`${OWN}/${'x'.repeat(60_000)}`, '{}');
		expect(longTopic.ok ? '' : longTopic.rejection.detail.length).toBe(300);
	});

	it.each([
		['nothing', Buffer.alloc(0)],
		['a number that is none', `{"t":${T},"seq":1,"map":"g","x":NaN,"y":0,"heading":0,"speed":0}`],
		['half a message', JSON.stringify(POSE).slice(0, 30)],
		['two messages', `${JSON.stringify(POSE)}${JSON.stringify(POSE)}`],
		['bytes that are not UTF-8', Buffer.from([0x22, 0xff, 0xfe, 0x22])],
		['UTF-16', Buffer.from(JSON.stringify(POSE), 'utf16le')],
		['zeros', Buffer.alloc(100)],
		['a depth bomb cut short', '['.repeat(MAX_PAYLOAD_BYTES)]
	])('as no JSON: %s', (_, body) => {
		expect(reason(body)).toBe('invalid_json');
	});

	it.each([
		['a depth bomb', `${'['.repeat(MAX_PAYLOAD_BYTES / 2)}${']'.repeat(MAX_PAYLOAD_BYTES / 2)}`],
		['a depth bomb in a field', `{"map":${'['.repeat(60_000)}${']'.repeat(60_000)}}`],
		['a bare value', 'null'],
		['a list', '[]'],
		['a number too large for JSON to hold', JSON.stringify(POSE).replace('1.5', '1e999')],
		['numbers as text', { ...POSE, x: '1.5' }],
		['a stamp in seconds', { ...POSE, t: T / 1000 }],
		['a stamp in microseconds', { ...POSE, t: T * 1000 }],
		['a number of half a message', { ...POSE, seq: 1.5 }],
		['only inherited fields', `{"__proto__":${JSON.stringify(POSE)}}`]
	])('as against the contract: %s', (_, body) => {
		expect(reason(body)).toBe('schema');
	});

	it('as past, when it is an answer the broker had kept', () => {
		const admission = send(`${OWN}/answer`, ANSWER, true);
		expect(admission).toMatchObject({ ok: false, rejection: { reason: 'past' } });
	});
});

it('cannot be made to change what objects inherit', () => {
	send(
		`${OWN}/pose`,
		`{"__proto__":{"polluted":1},"constructor":{"prototype":{"polluted":1}},${JSON.stringify(POSE).slice(1)}`
	);
	expect(({} as { polluted?: number }).polluted).toBeUndefined();
});

it('repairs lone surrogates, which neither SQLite nor UTF-8 can hold', () => {
	const body = JSON.stringify(STATE).replace('task-1', '\\ud800x').replace('4.2.0', '\\udc00');
	expect(send(`${OWN}/state`, body)).toMatchObject({ observation: { task: { id: '\ufffdx' }, software: '\ufffd' } });
});

it('takes a kept state again after a reconnect, but not a copy of a live one', () => {
	expect(send(`${OWN}/state`, STATE)).toMatchObject({ ok: true });
	expect(send(`${OWN}/state`, STATE, true)).toMatchObject({ ok: true, observation: { retained: true } });
	expect(reason(STATE, `${OWN}/state`)).toBe('out_of_order');
	expect(send(`${OWN}/state`, { ...STATE, seq: 0, t: T - 1 }, true)).toMatchObject({ ok: false });
});

it('counts each channel and each robot for itself', () => {
	const everyone = createGate({ robots: () => true });
	const verdicts = ['a/pose', 'b/pose', 'a/pose'].map((path, i) => {
		const admission = everyone.accept(
			`elbowroom/v1/saltmarsh/${path}`,
			Buffer.from(JSON.stringify({ ...POSE, seq: 9 - i, t: T + i })),
			false,
			T
		);
		return admission.ok && admission.kind === 'observation' ? admission.sequence?.verdict : null;
	});
	expect(verdicts).toEqual(['first', 'first', 'restart']);
});

it('a message against the contract does not move the sequence on', () => {
	expect(reason({ ...POSE, seq: 900, x: null })).toBe('schema');
	expect(reason(POSE)).toBe('accepted');
});

/** Every value in a tree that is not itself a tree. */
const leaves = (value: unknown): unknown[] =>
	value !== null && typeof value === 'object' ? Object.values(value).flatMap(leaves) : [value];

describe('whatever comes in, out comes a reason in words or an observation without a NaN', () => {
	const check = (topic: string, payload: Buffer, retained: boolean) => {
		const admission = createGate({ robots: () => true }).accept(topic, payload, retained, T);
		if (!admission.ok) {
			expect(admission.rejection.detail).not.toBe('');
			expect(admission.rejection.detail.length).toBeLessThanOrEqual(300);
		} else {
			const said = admission.kind === 'observation' ? admission.observation : admission.answer;
			expect(
				leaves(said).filter((leaf) => leaf === undefined || (typeof leaf === 'number' && !Number.isFinite(leaf)))
			).toEqual([]);
		}
		return admission.ok;
	};
	const channels = Object.keys(VALID) as (keyof typeof VALID)[];

	it('arbitrary topics and bytes', () => {
		const topic = fc.oneof(fc.string(), fc.constantFrom(...channels.map((channel) => `${OWN}/${channel}`)));
		fc.assert(
			fc.property(topic, fc.uint8Array({ maxLength: 300 }), fc.boolean(), (name, bytes, retained) => {
				check(name, Buffer.from(bytes), retained);
			}),
			{ numRuns: 2000 }
		);
	});

	it('arbitrary JSON', () => {
		fc.assert(
			fc.property(fc.constantFrom(...channels), fc.json(), (channel, text) => {
				check(`${OWN}/${channel}`, Buffer.from(text), false);
			}),
			{ numRuns: 2000 }
		);
	});

	it('good messages with fields replaced by anything', () => {
		const mutation = fc.record({
			channel: fc.constantFrom(...channels),
			field: fc.nat(),
			value: fc.oneof(fc.jsonValue(), fc.double(), fc.constant(undefined))
		});
		let accepted = 0;
		fc.assert(
			fc.property(mutation, ({ channel, field, value }) => {
				const names = Object.keys(VALID[channel]);
				const body = { ...VALID[channel], [names[field % names.length] as string]: value };
				if (check(`${OWN}/${channel}`, Buffer.from(JSON.stringify(body)), false)) accepted++;
			}),
			{ numRuns: 3000 }
		);
		expect(accepted).toBeGreaterThan(0);
	});

	it('good messages with bytes flipped', () => {
		const flips = fc.array(fc.tuple(fc.nat(), fc.nat(255)), { minLength: 1, maxLength: 4 });
		fc.assert(
			fc.property(fc.constantFrom(...channels), flips, (channel, list) => {
				const payload = Buffer.from(JSON.stringify(VALID[channel]));
				for (const [at, byte] of list) payload[at % payload.length] = byte;
				check(`${OWN}/${channel}`, payload, false);
			}),
			{ numRuns: 3000 }
		);
	});
});
