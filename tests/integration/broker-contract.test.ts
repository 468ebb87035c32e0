/** What the application needs of a broker, held against its own and against Mosquitto 2 with the files it writes. */

import { connect as connectTcp } from 'node:net';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { CHANNELS, type Channel } from '../../src/lib/contracts/mqtt.ts';
import { MAX_PACKET_BYTES } from '../../src/lib/server/broker/packet-limit.ts';
import {
	endClients,
	pose,
	signIn,
	signInRobot,
	signInService,
	state,
	topicOf,
	VENUE,
	type BrokerKind,
	type TestBroker
} from '../support/brokers.ts';
import { OWN_BROKER } from '../support/brokers-own.ts';
import { MOSQUITTO, whyNoMosquitto } from '../support/mosquitto.ts';

const excuse = whyNoMosquitto();
if (excuse !== null) console.warn(`Not tested: ${excuse}.`);
const kinds: BrokerKind[] = excuse === null ? [OWN_BROKER, MOSQUITTO] : [OWN_BROKER];

describe.each(kinds)('$name', ({ start }) => {
	let broker: TestBroker;
	beforeAll(async () => {
		broker = await start();
	});
	afterEach(endClients);
	afterAll(() => broker.stop());

	describe('signing in', () => {
		it('lets a robot in with its secret', async () => {
			const robot = await signInRobot(broker, 'porter-01');
			expect(robot.mqtt.connected).toBe(true);
		});

		it.each([
			['a wrong secret', { password: 'guess' }],
			['no secret', { password: '' }],
			['the name of a robot that does not exist', { username: `${VENUE}/porter-99` }],
			['the name of another robot', { username: `${VENUE}/porter-02` }],
			['another venue', { username: 'elsewhere/porter-01' }],
			['the name of the application', { username: 'desk' }],
			['a wildcard for a name', { username: `${VENUE}/+` }]
		])('refuses %s', async (_, login) => {
			// CONNACK 4 or 5: bad user name or password, not authorized (MQTT 3.1.1 §3.2.2.3)
			await expect(signInRobot(broker, 'porter-01', login)).rejects.toMatchObject({
				code: expect.toSatisfy((code: unknown) => code === 4 || code === 5) as unknown
			});
		});

		it('refuses a client without a name', async () => {
			await expect(signIn(broker.robotUrl, {})).rejects.toMatchObject({
				code: expect.toSatisfy((code: unknown) => code === 4 || code === 5) as unknown
			});
		});

		it('gives the connection to the newest of two with one credential, whatever client id they send', async () => {
			const first = await signInRobot(broker, 'porter-01', { clientId: 'one' });
			const other = await signInRobot(broker, 'porter-02');
			const second = await signInRobot(broker, 'porter-01', { clientId: 'two' });
			await first.closed();
			expect(second.mqtt.connected).toBe(true);
			expect(other.mqtt.connected).toBe(true);
		});

		it('does not end a connection for somebody who only claims its name', async () => {
			const robot = await signInRobot(broker, 'porter-01');
			const service = await signInService(broker, topicOf('porter-01', 'pose'));
			await expect(signInRobot(broker, 'porter-01', { password: 'guess' })).rejects.toThrow();
			await robot.say(topicOf('porter-01', 'pose'), pose(1));
			expect((await service.hears(topicOf('porter-01', 'pose'))).text).toContain('"seq":1');
		});

		it('lets the application hold several connections', async () => {
			const first = await signInService(broker, topicOf('porter-01', 'pose'));
			await signInService(broker);
			const robot = await signInRobot(broker, 'porter-01');
			await robot.say(topicOf('porter-01', 'pose'), pose(1));
			expect(await first.hears(topicOf('porter-01', 'pose'))).toBeDefined();
		});
	});

	describe('what may be said and heard', () => {
		it('a robot speaks on its five channels and the application hears it', async () => {
			const service = await signInService(broker, 'elbowroom/v1/#');
			const robot = await signInRobot(broker, 'porter-01');
			for (const channel of Object.keys(CHANNELS) as Channel[]) {
				await robot.say(topicOf('porter-01', channel), { channel });
				expect((await service.hears(topicOf('porter-01', channel))).text).toBe(JSON.stringify({ channel }));
			}
		});

		it('a robot speaks nowhere else, and its connection lives on', async () => {
			const service = await signInService(broker, 'elbowroom/v1/#');
			const victim = await signInRobot(broker, 'porter-02');
			await victim.mqtt.subscribeAsync(topicOf('porter-02', 'command'), { qos: 1 });
			const robot = await signInRobot(broker, 'porter-01');
			const elsewhere = [
				topicOf('porter-02', 'pose'),
				topicOf('porter-02', 'command'),
				topicOf('porter-01', 'command'),
				'elbowroom/v1/elsewhere/porter-01/pose',
				`elbowroom/v1/${VENUE}/porter-01/diary`,
				`elbowroom/v1/${VENUE}/porter-01`,
				`elbowroom/v1/${VENUE}/porter-01/pose/more`
			];
			for (const topic of elsewhere) await robot.say(topic, 'not mine', { retain: true });
			await robot.say(topicOf('porter-01', 'answer'), 'mine');
			await service.hears(topicOf('porter-01', 'answer'));
			await service.say(topicOf('porter-02', 'command'), 'real');
			await victim.hears(topicOf('porter-02', 'command'));

			expect(service.heard.filter(({ text }) => text === 'not mine')).toEqual([]);
			expect(victim.heard.map(({ text }) => text)).toEqual(['real']);
			const late = await signInService(broker, 'elbowroom/v1/#');
			await robot.say(topicOf('porter-01', 'answer'), 'mine');
			await late.hears(topicOf('porter-01', 'answer'));
			expect(late.heard.filter(({ text }) => text === 'not mine')).toEqual([]);
		});

		it('a robot hears its own commands and nothing of others', async () => {
			const robot = await signInRobot(broker, 'porter-01');
			for (const filter of [
				'#',
				'elbowroom/v1/#',
				'elbowroom/v1/+/+/command',
				topicOf('porter-02', 'command'),
				'$SYS/#'
			]) {
				// A broker may say no or say nothing; what counts is what arrives.
				await robot.mqtt.subscribeAsync(filter, { qos: 1 }).catch(() => {});
			}
			await robot.mqtt.subscribeAsync(topicOf('porter-01', 'command'), { qos: 1 });
			const other = await signInRobot(broker, 'porter-02');
			const service = await signInService(broker);
			await other.say(topicOf('porter-02', 'pose'), pose(1));
			await service.say(topicOf('porter-02', 'command'), 'for the other');
			await service.say(topicOf('porter-01', 'command'), 'for me');
			await robot.hears(topicOf('porter-01', 'command'));
			expect(new Set(robot.heard.map(({ topic }) => topic))).toEqual(new Set([topicOf('porter-01', 'command')]));
		});

		it('the application does not speak for a robot', async () => {
			const listener = await signInService(broker, 'elbowroom/v1/#');
			const service = await signInService(broker);
			await service.say(topicOf('porter-01', 'pose'), 'forged');
			await service.say(topicOf('porter-01', 'command'), 'real');
			await listener.hears(topicOf('porter-01', 'command'));
			expect(listener.heard.filter(({ text }) => text === 'forged')).toEqual([]);
		});

		it('a command goes to its robot and the answer comes back', async () => {
			const service = await signInService(broker, topicOf('porter-01', 'answer'));
			const robot = await signInRobot(broker, 'porter-01');
			await robot.mqtt.subscribeAsync(topicOf('porter-01', 'command'), { qos: 1 });
			await service.say(topicOf('porter-01', 'command'), { id: 'c1', kind: 'pause', expires_at: Date.now() + 5000 });
			const command = JSON.parse((await robot.hears(topicOf('porter-01', 'command'))).text) as { id: string };
			await robot.say(topicOf('porter-01', 'answer'), { id: command.id, status: 'seen' });
			expect((await service.hears(topicOf('porter-01', 'answer'))).text).toBe('{"id":"c1","status":"seen"}');
		});
	});

	describe('last words and kept messages', () => {
		const will = (robot: string) => ({
			topic: topicOf(robot, 'connection'),
			payload: Buffer.from(JSON.stringify({ t: Date.now(), status: 'lost' })),
			qos: 1 as const,
			retain: true
		});

		it('tells of a robot that is cut off, and keeps it for those who come later', async () => {
			const service = await signInService(broker, topicOf('porter-01', 'connection'));
			const robot = await signInRobot(broker, 'porter-01', { will: will('porter-01') });
			await robot.cut();
			expect((await service.hears(topicOf('porter-01', 'connection'))).text).toContain('lost');
			const late = await signInService(broker, topicOf('porter-01', 'connection'));
			expect(await late.hears(topicOf('porter-01', 'connection'))).toMatchObject({
				retain: true,
				text: expect.stringContaining('lost') as string
			});
		});

		it('says nothing for a robot that takes its leave', async () => {
			const robot = await signInRobot(broker, 'porter-02', { will: will('porter-02') });
			const service = await signInService(broker, 'elbowroom/v1/+/porter-02/+');
			await robot.mqtt.endAsync();
			const again = await signInRobot(broker, 'porter-02');
			await again.say(topicOf('porter-02', 'answer'), 'back');
			await service.hears(topicOf('porter-02', 'answer'));
			expect(service.heard.filter(({ topic }) => topic.endsWith('/connection'))).toEqual([]);
		});

		it('speaks no last words on the topic of another robot', async () => {
			const service = await signInService(broker, 'elbowroom/v1/#');
			// A broker may refuse such a client outright.
			const robot = await signInRobot(broker, 'porter-01', { will: { ...will('porter-03'), retain: false } }).catch(
				() => null
			);
			await robot?.cut();
			const other = await signInRobot(broker, 'porter-03');
			await other.say(topicOf('porter-03', 'answer'), 'here');
			await service.hears(topicOf('porter-03', 'answer'));
			expect(
				service.heard.filter(({ topic, retain }) => topic === topicOf('porter-03', 'connection') && !retain)
			).toEqual([]);
		});

		it('keeps the latest state for a late listener, marked as kept; live it is not marked', async () => {
			const early = await signInService(broker, topicOf('porter-02', 'state'));
			const robot = await signInRobot(broker, 'porter-02');
			await robot.say(topicOf('porter-02', 'state'), state(1), { retain: true });
			await robot.say(topicOf('porter-02', 'state'), state(2), { retain: true });
			expect((await early.hears(topicOf('porter-02', 'state'))).retain).toBe(false);
			const late = await signInService(broker, topicOf('porter-02', 'state'));
			expect(await late.hears(topicOf('porter-02', 'state'))).toMatchObject({
				retain: true,
				text: expect.stringContaining('"seq":2') as string
			});
		});
	});

	describe('trouble', () => {
		it('lets through what is merely too large and drops the connection beyond the limit; others go on', async () => {
			const service = await signInService(broker, 'elbowroom/v1/#');
			const other = await signInRobot(broker, 'porter-02');
			const robot = await signInRobot(broker, 'porter-01');
			await robot.say(topicOf('porter-01', 'people'), Buffer.alloc(1_000_000, 0x20));
			expect((await service.hears(topicOf('porter-01', 'people'))).text).toHaveLength(1_000_000);

			robot.mqtt.publish(topicOf('porter-01', 'answer'), Buffer.alloc(MAX_PACKET_BYTES, 0x20), { qos: 0 });
			await robot.closed();
			await other.say(topicOf('porter-02', 'pose'), pose(1));
			await service.hears(topicOf('porter-02', 'pose'));
			expect(service.heard.filter(({ topic }) => topic === topicOf('porter-01', 'answer'))).toEqual([]);
		});

		it('goes on after bytes that are not MQTT', async () => {
			const port = Number(new URL(broker.robotUrl).port);
			for (const bytes of ['GET / HTTP/1.1\r\n\r\n', '\x00', '\x10\xff\xff\xff\x7f', '\xff'.repeat(5000)]) {
				const socket = connectTcp(port, '127.0.0.1');
				socket.on('error', () => {});
				socket.end(Buffer.from(bytes, 'latin1'));
				socket.resume();
				await new Promise((resolve) => socket.once('close', resolve));
			}
			const robot = await signInRobot(broker, 'porter-01');
			expect(robot.mqtt.connected).toBe(true);
		});

		it('ends the connection of a credential that is taken back, and no other', async () => {
			const other = await signInRobot(broker, 'porter-02');
			const robot = await signInRobot(broker, 'porter-03');
			await broker.revoke('porter-03');
			await robot.closed();
			await expect(signInRobot(broker, 'porter-03')).rejects.toThrow();
			await other.say(topicOf('porter-02', 'pose'), pose(1));
			expect(other.mqtt.connected).toBe(true);
		});
	});
});
