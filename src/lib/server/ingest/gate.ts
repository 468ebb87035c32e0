/** Decides which messages enter: bytes from the network in, a checked observation or a reason out. */

import { isUtf8 } from 'node:buffer';
import type { z } from 'zod';
import {
	CHANNELS,
	isChannel,
	MAX_PAYLOAD_BYTES,
	parseTopic,
	type Answer,
	type Channel,
	type RobotTopic
} from '../../contracts/mqtt.ts';
import type { RobotObservation, RejectionReason } from '../../domain/engine/observation.ts';
import { observationOf, wellFormedAnswer, type AnswerMessage, type Message } from './observe.ts';
import { stepSequence, type SequenceState, type SequenceVerdict } from './sequence.ts';
import { compileShape } from './shape.ts';

/** Whether a robot is in service at a venue. Asked for every message, so it must be cheap. */
export type RobotLookup = (venue: string, robot: string) => boolean;

export interface Rejection {
	readonly reason: RejectionReason;
	/** Key of the robot; null when the topic names none we know, so that strangers cannot fill our counts with names. */
	readonly robot: string | null;
	/** Plain words, at most 300 characters */
	readonly detail: string;
}

export type Admission =
	| {
			readonly ok: true;
			readonly kind: 'observation';
			readonly venue: string;
			readonly observation: RobotObservation;
			/** How its number continues the channel; null for `connection`, which has none. */
			readonly sequence: { readonly seq: number; readonly verdict: SequenceVerdict } | null;
	  }
	| {
			readonly ok: true;
			readonly kind: 'answer';
			readonly venue: string;
			readonly robot: string;
			readonly answer: Answer;
			/** s since the epoch, server clock */
			readonly receivedAt: number;
	  }
	| { readonly ok: false; readonly rejection: Rejection };

export interface Gate {
	/**
	 * Judges one message. Never throws, whatever the bytes; keeps nothing of `payload`. The checks in order: size,
	 * topic, robot, JSON, contract, sequence; the first that fails is the reason.
	 *
	 * @param retained the broker had kept it from before we subscribed
	 * @param receivedAtMs ms since the epoch, server clock
	 */
	accept(topic: string, payload: Buffer, retained: boolean, receivedAtMs: number): Admission;
}

const MAX_DETAIL = 300;
const MAX_ISSUES = 3;

const FITS = Object.fromEntries(
	Object.entries(CHANNELS).map(([channel, { schema }]) => [channel, compileShape(schema)])
) as Record<Channel, (value: unknown) => boolean>;

/** A gate that has seen nothing yet. It remembers the last sequence number per robot and channel. */
export function createGate({ robots }: { readonly robots: RobotLookup }): Gate {
	const sequences = new Map<string, SequenceState>();
	/** Topics of robots in service, taken apart */
	const topics = new Map<string, RobotTopic>();

	return {
		accept(topic, payload, retained, receivedAtMs) {
			const to = topics.get(topic) ?? parseTopic(topic);
			const robot = to !== null && robots(to.venue, to.robot) ? to.robot : null;
			if (payload.length > MAX_PAYLOAD_BYTES) {
				return refuse('too_large', robot, `${payload.length} bytes; at most ${MAX_PAYLOAD_BYTES} are read`);
			}
			if (to === null || !isChannel(to.channel)) {
				return refuse('unknown_topic', robot, `nothing is read from ${JSON.stringify(topic)}`);
			}
			if (robot === null) {
				return refuse('unknown_robot', null, `no robot ${to.robot} is in service at ${to.venue}`);
			}

			topics.set(topic, to);

			const json = parseJson(payload);
			if (!json.ok) return refuse('invalid_json', robot, json.detail);
			const read = readMessage(to.channel, json.value);
			if (!read.ok) return refuse('schema', robot, read.detail);

			const receipt = { robot, receivedAt: receivedAtMs / 1000, retained };
			if (read.channel === 'answer') {
				if (retained) return refuse('past', robot, 'an answer kept by the broker belongs to a command of long ago');
				const answer = wellFormedAnswer(read.message);
				return { ok: true, kind: 'answer', venue: to.venue, robot, answer, receivedAt: receipt.receivedAt };
			}
			const observation = observationOf(read, receipt);
			if (read.channel === 'connection') {
				return { ok: true, kind: 'observation', venue: to.venue, observation, sequence: null };
			}

			const { seq, t } = read.message;
			const key = `${to.venue}/${robot}/${to.channel}`;
			const last = sequences.get(key) ?? null;
			// After every reconnect the broker hands out the kept state again: nothing new, and nothing wrong.
			if (retained && last !== null && last.seq === seq && last.tMs === t) {
				return { ok: true, kind: 'observation', venue: to.venue, observation, sequence: { seq, verdict: 'next' } };
			}
			const { state, verdict } = stepSequence(last, seq, t);
			sequences.set(key, state);
			if (verdict === 'out_of_order') return refuse('out_of_order', robot, outOfOrder(to.channel, seq, state.seq));
			return { ok: true, kind: 'observation', venue: to.venue, observation, sequence: { seq, verdict } };
		}
	};
}

type Read = ({ readonly ok: true } & (Message | AnswerMessage)) | { readonly ok: false; readonly detail: string };

function readMessage(channel: Channel, value: unknown): Read {
	if (FITS[channel](value)) return { ok: true, channel, message: value } as Read;
	const parsed = CHANNELS[channel].schema.safeParse(value);
	return parsed.success
		? ({ ok: true, channel, message: parsed.data } as Read)
		: { ok: false, detail: inWords(parsed.error) };
}

type Json = { readonly ok: true; readonly value: unknown } | { readonly ok: false; readonly detail: string };

/** `JSON.parse` walks without recursion and makes `__proto__` an ordinary key, so neither depth nor names do harm. */
function parseJson(payload: Buffer): Json {
	if (payload.length === 0) return { ok: false, detail: 'the message is empty' };
	if (!isUtf8(payload)) return { ok: false, detail: 'the bytes are not UTF-8' };
	const text = payload.toString('utf8');
	try {
		// RFC 8259 §8.1 lets a reader ignore the byte order mark some libraries write.
		return { ok: true, value: JSON.parse(text.charCodeAt(0) === 0xfeff ? text.slice(1) : text) };
	} catch (cause) {
		return { ok: false, detail: cause instanceof SyntaxError ? cause.message : 'it cannot be read' };
	}
}

function inWords({ issues }: z.ZodError): string {
	const lines = issues.slice(0, MAX_ISSUES).map(({ path, message }) => `${pathInWords(path)}: ${message}`);
	if (issues.length > MAX_ISSUES) lines.push(`and ${issues.length - MAX_ISSUES} more`);
	return lines.join('; ');
}

const pathInWords = (path: readonly PropertyKey[]): string =>
	path.reduce<string>(
		(text, key) => (typeof key === 'number' ? `${text}[${key}]` : text === '' ? String(key) : `${text}.${String(key)}`),
		''
	) || 'message';

const outOfOrder = (channel: Channel, seq: number, last: number): string =>
	seq === last ? `${channel} ${seq} came twice` : `${channel} ${seq} came after ${last}`;

const refuse = (reason: RejectionReason, robot: string | null, detail: string): Admission => ({
	ok: false,
	rejection: { reason, robot, detail: detail.slice(0, MAX_DETAIL).toWellFormed() }
});
