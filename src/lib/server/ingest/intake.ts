/** One message from the broker to whom it concerns: the gate, the watch for shared credentials and the log of what was refused. */

import type { Answer } from '../../contracts/mqtt.ts';
import type { RobotObservation } from '../../domain/engine/observation.ts';
import { createDuplicateWatch } from './duplicates.ts';
import { createGate, type RobotLookup } from './gate.ts';
import type { RejectedLog } from './rejected.ts';

export interface DuplicateCredential {
	readonly venue: string;
	readonly robot: string;
	/** False when the finding is over. */
	readonly active: boolean;
	readonly atMs: number;
}

export interface IntakeOptions {
	readonly robots: RobotLookup;
	readonly rejected: Pick<RejectedLog, 'record'>;
	onObservation(venue: string, observation: RobotObservation): void;
	onAnswer?(venue: string, robot: string, answer: Answer, receivedAt: number): void;
	onDuplicate?(finding: DuplicateCredential): void;
}

export interface Intake {
	/** Takes one message as `startMqttSource` hands it out; `receivedAtMs` is the server's clock. */
	take(topic: string, payload: Buffer, retained: boolean, receivedAtMs: number): void;
	/** Ends findings that have gone quiet; call about once a second. */
	tick(nowMs: number): void;
	/** Messages received so far, used or not. */
	received(): number;
	/** ms since the epoch; null before the first message */
	lastMessageAtMs(): number | null;
	/** `{venue}/{robot}` of robots whose credential seems to be in use twice now */
	duplicates(): string[];
}

/** An intake that has received nothing yet. */
export function createIntake(options: IntakeOptions): Intake {
	const gate = createGate({ robots: options.robots });
	const watch = createDuplicateWatch();
	let received = 0;
	let lastMessageAtMs: number | null = null;

	const report = (name: string, active: boolean, atMs: number) => {
		const [venue = '', robot = ''] = name.split('/');
		options.onDuplicate?.({ venue, robot, active, atMs });
	};

	return {
		take(topic, payload, retained, receivedAtMs) {
			received++;
			lastMessageAtMs = receivedAtMs;
			const admission = gate.accept(topic, payload, retained, receivedAtMs);
			if (!admission.ok) return options.rejected.record(admission.rejection, topic, payload, receivedAtMs);
			if (admission.kind === 'answer') {
				return options.onAnswer?.(admission.venue, admission.robot, admission.answer, admission.receivedAt);
			}
			const { venue, observation, sequence } = admission;
			if (sequence && !retained) {
				const name = `${venue}/${observation.robot}`;
				if (watch.observe(name, observation.kind, sequence.seq, sequence.verdict, receivedAtMs)) {
					report(name, true, receivedAtMs);
				}
			}
			options.onObservation(venue, observation);
		},
		tick(nowMs) {
			for (const name of watch.clear(nowMs)) report(name, false, nowMs);
		},
		received: () => received,
		lastMessageAtMs: () => lastMessageAtMs,
		duplicates: watch.found
	};
}
