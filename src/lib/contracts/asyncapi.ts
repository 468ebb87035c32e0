/** The robot contract as an AsyncAPI 3.0 document, made from the same schemas that check every message. */

import { z } from 'zod';
import { CHANNELS, Command, MAX_PAYLOAD_BYTES, robotTopic, TOPIC_PREFIX, type Channel } from './mqtt.ts';

type Json = { readonly [key: string]: unknown };

const SUMMARIES: Readonly<Record<Channel | 'command', string>> = {
	pose: 'Where the robot is, 5 to 10 times a second.',
	people:
		'Whom the robot sees, 5 to 10 times a second. An empty list says that nobody is there; no message says nothing.',
	state: 'What the robot is doing, on every change and at least every 5 s.',
	connection: 'Whether the robot is connected: online after connecting, offline before leaving, lost as the last will.',
	command: 'A request to the robot. It is not an emergency stop. Ignored after expires_at; never kept by the broker.',
	answer: 'How far the robot has got with a command.'
};

const COMMAND = { schema: Command, qos: 1, retain: false };

/**
 * The document, as plain JSON. Seen from the desk, as AsyncAPI 3.0 asks: the desk receives what robots publish and
 * sends commands. Payloads describe what may be sent, in JSON Schema draft 7, which every AsyncAPI tool reads.
 */
export function asyncApiDocument(version: string): Json {
	const all = { ...CHANNELS, command: COMMAND };
	const names = Object.keys(all) as (keyof typeof all)[];
	return {
		asyncapi: '3.0.0',
		info: {
			title: 'Elbowroom robot contract',
			version,
			description: [
				`JSON over MQTT 3.1.1 below \`${TOPIC_PREFIX}\`. SI units, the robot's own map frame, angles counter-clockwise from +x.`,
				"`t` is the robot's clock in ms since the epoch; `seq` counts up per channel and robot.",
				'A robot signs in with the user name `{venue}/{robot}` and its secret, uses the same text as client id, asks for a clean session, and may only publish below its own name and read its own commands.',
				`A payload has at most ${MAX_PAYLOAD_BYTES} bytes.`
			].join('\n\n')
		},
		defaultContentType: 'application/json',
		channels: Object.fromEntries(names.map((name) => [name, channel(name)])),
		operations: Object.fromEntries(names.map((name) => [operationName(name), operation(name, all[name])])),
		components: {
			messages: Object.fromEntries(names.map((name) => [name, message(name, all[name].schema)])),
			parameters: {
				venue: { description: 'Key of the venue', examples: ['saltmarsh'] },
				robot: { description: 'Key of the robot, unique in its venue', examples: ['porter-03'] }
			},
			securitySchemes: { robotSecret: { type: 'userPassword' } }
		}
	};
}

const operationName = (name: Channel | 'command'): string =>
	`${name === 'command' ? 'send' : 'receive'}${name.charAt(0).toUpperCase()}${name.slice(1)}`;

const channel = (name: Channel | 'command'): Json => ({
	address: robotTopic('{venue}', '{robot}', name),
	messages: { [name]: { $ref: `#/components/messages/${name}` } },
	parameters: {
		venue: { $ref: '#/components/parameters/venue' },
		robot: { $ref: '#/components/parameters/robot' }
	}
});

const operation = (name: Channel | 'command', { qos, retain }: { qos: number; retain: boolean }): Json => ({
	action: name === 'command' ? 'send' : 'receive',
	channel: { $ref: `#/channels/${name}` },
	messages: [{ $ref: `#/channels/${name}/messages/${name}` }],
	bindings: { mqtt: { qos, retain, bindingVersion: '0.2.0' } }
});

const message = (name: Channel | 'command', schema: z.ZodType): Json => {
	const { $schema: _, ...payload } = z.toJSONSchema(schema, { target: 'draft-7', io: 'input' });
	return { name, summary: SUMMARIES[name], contentType: 'application/json', payload };
};
