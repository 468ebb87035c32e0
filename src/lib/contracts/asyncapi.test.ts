import { describe, expect, it } from 'vitest';
import { asyncApiDocument } from './asyncapi.ts';
import { CHANNELS, parseTopic } from './mqtt.ts';

interface Document {
	asyncapi: string;
	info: { title: string; version: string };
	channels: Record<string, { address: string; parameters: object }>;
	operations: Record<string, { action: string; channel: { $ref: string }; bindings: { mqtt: object } }>;
	components: { messages: Record<string, { payload: { type: string; required: string[]; properties: object } }> };
}

const document = asyncApiDocument('0.1.0') as unknown as Document;
const names = [...Object.keys(CHANNELS), 'command'];

/** What a local reference points at; undefined when it points nowhere. */
const resolve = (ref: string): unknown =>
	ref
		.slice(2)
		.split('/')
		.reduce<unknown>((node, key) => (node as Record<string, unknown> | undefined)?.[key], document);

const references = (node: unknown): string[] => {
	if (node === null || typeof node !== 'object') return [];
	return Object.entries(node).flatMap(([key, value]) => (key === '$ref' ? [value as string] : references(value)));
};

it('has every channel of the contract, and the command, at the address robots use', () => {
	expect(Object.keys(document.channels).sort()).toEqual([...names].sort());
	for (const name of names) {
		const topic = document.channels[name]?.address.replace('{venue}', 'saltmarsh').replace('{robot}', 'porter-01');
		expect(parseTopic(topic ?? '')).toEqual({ venue: 'saltmarsh', robot: 'porter-01', channel: name });
	}
});

it('says who sends what, how surely and whether it is kept', () => {
	const seen = Object.values(document.operations).map(({ action, channel, bindings }) => [
		channel.$ref.split('/').at(-1),
		action,
		bindings.mqtt
	]);
	expect(seen).toHaveLength(names.length);
	for (const [name, { qos, retain }] of Object.entries(CHANNELS)) {
		expect(seen).toContainEqual([name, 'receive', { qos, retain, bindingVersion: '0.2.0' }]);
	}
	expect(seen).toContainEqual(['command', 'send', { qos: 1, retain: false, bindingVersion: '0.2.0' }]);
});

it('points at nothing that is not there', () => {
	const found = references(document);
	expect(found.length).toBeGreaterThan(names.length * 4);
	for (const ref of found) expect(resolve(ref), ref).toBeDefined();
});

it('is plain JSON', () => {
	expect(JSON.parse(JSON.stringify(document))).toEqual(document);
});

describe('payloads', () => {
	it.each(names)('%s is an object with its required fields', (name) => {
		const { payload } = document.components.messages[name]!;
		expect(payload.type).toBe('object');
		expect(payload.required.length).toBeGreaterThan(1);
		expect(Object.keys(payload.properties)).toEqual(expect.arrayContaining(payload.required));
	});

	it('describe what may be sent: the id of a person may be a number', () => {
		const { persons } = document.components.messages.people!.payload.properties as {
			persons: { items: { properties: { id: { anyOf: { type: string }[] } } } };
		};
		expect(persons.items.properties.id.anyOf.map(({ type }) => type)).toEqual(['string', 'integer']);
	});
});
