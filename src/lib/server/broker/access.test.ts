import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { CHANNELS, MAX_PAYLOAD_BYTES } from '../../contracts/mqtt.ts';
import { mayPublish, maySubscribe, type Identity } from './access.ts';

const ROBOT: Identity = { kind: 'robot', username: 'saltmarsh/porter-01', credential: 1 };
const SERVICE: Identity = { kind: 'service' };
const OWN = 'elbowroom/v1/saltmarsh/porter-01';

describe('a robot', () => {
	it('publishes on its own five channels', () => {
		for (const channel of Object.keys(CHANNELS))
			expect(mayPublish(ROBOT, `${OWN}/${channel}`, false, 10)).toBe('granted');
	});

	it.each([
		`${OWN}/command`,
		`${OWN}/else`,
		`${OWN}/`,
		OWN,
		`${OWN}/pose/more`,
		`${OWN}/toString`,
		'elbowroom/v1/saltmarsh/porter-011/pose',
		'elbowroom/v1/saltmarsh/porter-02/pose',
		'elbowroom/v1/other/porter-01/pose',
		'elbowroom/v2/saltmarsh/porter-01/pose',
		`/${OWN}/pose`,
		'$SYS/broker/uptime',
		''
	])('may not publish on %j', (topic) => {
		expect(mayPublish(ROBOT, topic, false, 10)).toBe('refused');
	});

	it('leaves its state and its connection behind, and nothing else', () => {
		const kept = Object.keys(CHANNELS).filter(
			(channel) => mayPublish(ROBOT, `${OWN}/${channel}`, true, 10) === 'granted'
		);
		expect(kept).toEqual(['state', 'connection']);
		expect(mayPublish(ROBOT, `${OWN}/answer`, true, 10)).toBe('not_kept');
	});

	it('cannot fill the memory of the broker with oversize kept messages', () => {
		expect(mayPublish(ROBOT, `${OWN}/state`, true, MAX_PAYLOAD_BYTES + 1)).toBe('not_kept');
	});

	it('reads its own commands and nothing else', () => {
		expect(maySubscribe(ROBOT, `${OWN}/command`)).toBe(true);
		for (const filter of [
			'#',
			'+/#',
			`${OWN}/#`,
			`${OWN}/+`,
			`${OWN}/pose`,
			'elbowroom/v1/+/+/command',
			'$SYS/#',
			''
		]) {
			expect(maySubscribe(ROBOT, filter)).toBe(false);
		}
	});

	it('gets nowhere with any topic that is not below its own name', () => {
		fc.assert(
			fc.property(fc.string(), fc.boolean(), (topic, retain) => {
				fc.pre(!topic.startsWith(OWN));
				expect(mayPublish(ROBOT, topic, retain, 0)).toBe('refused');
				expect(maySubscribe(ROBOT, topic)).toBe(false);
			})
		);
	});
});

describe('the application', () => {
	it('publishes commands, never kept ones', () => {
		expect(mayPublish(SERVICE, `${OWN}/command`, false, 10)).toBe('granted');
		expect(mayPublish(SERVICE, `${OWN}/command`, true, 10)).toBe('refused');
	});

	it('cannot speak for a robot', () => {
		for (const channel of Object.keys(CHANNELS))
			expect(mayPublish(SERVICE, `${OWN}/${channel}`, false, 10)).toBe('refused');
	});

	it('reads everything of ours and nothing of the broker', () => {
		expect(maySubscribe(SERVICE, 'elbowroom/v1/#')).toBe(true);
		expect(maySubscribe(SERVICE, 'elbowroom/v1/+/+/+')).toBe(true);
		expect(maySubscribe(SERVICE, '#')).toBe(false);
		expect(maySubscribe(SERVICE, '$SYS/#')).toBe(false);
	});
});
