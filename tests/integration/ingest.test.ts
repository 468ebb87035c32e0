/** From a robot's message on the wire to an observation or a stored reason, through both brokers. */

import pino from 'pino';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { MAX_PAYLOAD_BYTES, type Answer } from '../../src/lib/contracts/mqtt.ts';
import type { RobotObservation } from '../../src/lib/domain/engine/observation.ts';
import { createIntake, type DuplicateCredential, type Intake } from '../../src/lib/server/ingest/intake.ts';
import { startMqttSource, type MqttSource, type SourceState } from '../../src/lib/server/ingest/mqtt-source.ts';
import { startRejectedLog, type RejectedLog } from '../../src/lib/server/ingest/rejected.ts';
import { openDatabase, type OpenDatabase } from '../../src/lib/server/db/connection.ts';
import { migrateToLatest } from '../../src/lib/server/db/migrate.ts';
import {
	endClients,
	pose,
	ROBOTS,
	SERVICE,
	signInRobot,
	signInService,
	state,
	topicOf,
	until,
	VENUE,
	type BrokerKind,
	type TestBroker
} from '../support/brokers.ts';
import { OWN_BROKER } from '../support/brokers-own.ts';
import { MOSQUITTO, whyNoMosquitto } from '../support/mosquitto.ts';

const excuse = whyNoMosquitto();
if (excuse !== null) console.warn(`Not tested: ${excuse}.`);
const kinds: BrokerKind[] = excuse === null ? [OWN_BROKER, MOSQUITTO] : [OWN_BROKER];

describe.each(kinds)('ingest through $name', ({ start }) => {
	let broker: TestBroker;
	let database: OpenDatabase;
	let rejected: RejectedLog;
	let intake: Intake;
	let source: MqttSource;
	let observations: RobotObservation[];
	let answers: Answer[];
	let findings: DuplicateCredential[];
	let states: SourceState[];

	beforeAll(async () => {
		broker = await start();
	});
	afterAll(() => broker.stop());

	beforeEach(async () => {
		database = openDatabase(':memory:');
		await migrateToLatest(database.db);
		rejected = startRejectedLog({ db: database.db, log: pino({ level: 'silent' }), flushEveryMs: 60_000 });
		[observations, answers, findings, states] = [[], [], [], []];
		intake = createIntake({
			robots: (venue, robot) => venue === VENUE && (ROBOTS as readonly string[]).includes(robot),
			rejected,
			onObservation: (_venue, observation) => observations.push(observation),
			onAnswer: (_venue, _robot, answer) => answers.push(answer),
			onDuplicate: (finding) => findings.push(finding)
		});
		source = startMqttSource({
			url: broker.serviceUrl,
			...SERVICE,
			venues: [],
			onMessage: (topic, payload, retained) => intake.take(topic, payload, retained, Date.now()),
			onState: (now) => states.push(now)
		});
		await until(() => source.state().kind === 'connected', 'the source to be connected');
	});
	afterEach(async () => {
		await endClients();
		await source.stop();
		await rejected.stop();
		await database.close();
	});

	it('goes on through rubbish, and stores what was refused and why', async () => {
		const robot = await signInRobot(broker, 'porter-01');
		const topic = topicOf('porter-01', 'pose');
		const rubbish = [Buffer.alloc(0), Buffer.from([0xff, 0x00]), '{"t":', '[]', '['.repeat(5000), 'null', '{"x":NaN}'];
		const first = pose(1);
		await robot.say(topic, first);
		for (const body of rubbish) await robot.say(topic, body);
		await robot.say(topic, first);
		await robot.say(topic, Buffer.alloc(MAX_PAYLOAD_BYTES + 1, 0x41));
		await robot.say(topic, pose(2));
		await until(() => observations.length === 2, 'the second pose');

		expect(Object.fromEntries(rejected.byReason())).toEqual({
			invalid_json: 5,
			schema: 2,
			out_of_order: 1,
			too_large: 1
		});
		await rejected.flush();
		const rows = await database.db.selectFrom('rejected_message').selectAll().orderBy('id').execute();
		expect(rows.map(({ reason }) => reason)).toHaveLength(9);
		expect(rows[1]).toMatchObject({ topic, robot: 'porter-01', reason: 'invalid_json', size_bytes: 2 });
		expect([...(rows[1]?.payload ?? [])]).toEqual([0xff, 0x00]);
		expect(rows[8]).toMatchObject({ reason: 'too_large', size_bytes: MAX_PAYLOAD_BYTES + 1 });
		expect(rows[8]?.payload).toHaveLength(512);
	});

	it('marks what the broker had kept, and only that', async () => {
		const robot = await signInRobot(broker, 'porter-02');
		await robot.say(topicOf('porter-02', 'state'), state(7), { retain: true });
		await until(() => observations.length === 1, 'the live state');
		expect(observations[0]?.retained).toBe(false);

		const late: boolean[] = [];
		const second = startMqttSource({
			url: broker.serviceUrl,
			...SERVICE,
			venues: [VENUE],
			onMessage: (topic, _payload, retained) => topic === topicOf('porter-02', 'state') && late.push(retained)
		});
		await until(() => late.length > 0, 'the kept state');
		expect(late).toEqual([true]);
		await second.stop();
	});

	it('hears answers and not the commands of the application', async () => {
		const robot = await signInRobot(broker, 'porter-01');
		await robot.mqtt.subscribeAsync(topicOf('porter-01', 'command'), { qos: 1 });
		const service = await signInService(broker);
		await service.say(topicOf('porter-01', 'command'), { id: 'c9', kind: 'pause', expires_at: Date.now() + 1000 });
		await robot.hears(topicOf('porter-01', 'command'));
		await robot.say(topicOf('porter-01', 'answer'), { id: 'c9', status: 'refused', text: 'door' });
		await until(() => answers.length > 0, 'the answer');
		expect(answers).toEqual([{ id: 'c9', status: 'refused', text: 'door' }]);
		expect(rejected.total()).toBe(0);
	});

	it('finds two robots that take turns with one credential', async () => {
		const topic = topicOf('porter-03', 'pose');
		const next = [5000, 40];
		for (let turn = 0; turn < 8; turn++) {
			const robot = await signInRobot(broker, 'porter-03', { clientId: `body-${turn % 2}` });
			for (let i = 0; i < 10; i++) {
				const seq = next[turn % 2]!++;
				// The stamp rises with each message, as it does at 10 Hz.
				await robot.say(topic, pose(seq, Date.now() + turn * 100 + i));
			}
		}
		await until(() => findings.length > 0, 'the finding');
		expect(findings).toMatchObject([{ venue: VENUE, robot: 'porter-03', active: true }]);
	});

	it('survives a restart of the broker and goes on by itself', async () => {
		states.length = 0;
		await broker.restart();
		await until(() => source.state().kind === 'connected' && states.length >= 2, 'the source to be back');
		expect(states.map(({ kind }) => kind)).toEqual(expect.arrayContaining(['disconnected', 'connected']));
		const robot = await signInRobot(broker, 'porter-01');
		await robot.say(topicOf('porter-01', 'pose'), pose(500));
		await until(() => observations.some(({ kind }) => kind === 'pose'), 'a pose after the restart');
		expect(rejected.total()).toBe(0);
	});

	it('keeps trying when it is refused, and says why', async () => {
		const refused = startMqttSource({
			url: broker.serviceUrl,
			username: SERVICE.username,
			password: 'wrong',
			venues: [],
			onMessage: () => {}
		});
		const said = await until(() => {
			const now = refused.state();
			return now.kind === 'disconnected' ? now.message : null;
		}, 'a refusal');
		expect(said).toBe('The broker refuses the user name or password of the application.');
		await refused.stop();
	});
});
