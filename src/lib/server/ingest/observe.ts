/** Turns a checked message of the native contract into the domain's words: seconds, camel case, null for what is not there. */

import type { z } from 'zod';
import type { Answer, Connection, People, Pose, State } from '../../contracts/mqtt.ts';
import type { RobotObservation } from '../../domain/engine/observation.ts';
import { secondsFromMs } from '../../domain/units.ts';

export type Message =
	| { readonly channel: 'pose'; readonly message: Pose }
	| { readonly channel: 'people'; readonly message: z.input<typeof People> }
	| { readonly channel: 'state'; readonly message: State }
	| { readonly channel: 'connection'; readonly message: Connection };

/** Answers are not observations: they concern a command, not the floor. */
export interface AnswerMessage {
	readonly channel: 'answer';
	readonly message: Answer;
}

export interface Receipt {
	readonly robot: string;
	/** s since the epoch, server clock */
	readonly receivedAt: number;
	readonly retained: boolean;
}

/**
 * The observation a message carries. Texts come out well-formed: a lone surrogate, which JSON can carry but neither
 * SQLite nor UTF-8 can, becomes U+FFFD.
 */
export function observationOf(said: Message, receipt: Receipt): RobotObservation {
	const base = { ...receipt, robotTime: secondsFromMs(said.message.t) };
	switch (said.channel) {
		case 'pose': {
			const { map, x, y, heading, speed } = said.message;
			return { kind: 'pose', ...base, map: map.toWellFormed(), x, y, heading, speed };
		}
		case 'people': {
			const { map, range_m, fov, blocked, persons } = said.message;
			return {
				kind: 'people',
				...base,
				map: map.toWellFormed(),
				range: range_m,
				fieldOfView: fov ?? null,
				blocked: blocked ?? null,
				persons: persons.map(({ id, x, y, vx, vy, sd }) => ({
					id: String(id).toWellFormed(),
					x,
					y,
					vx: vx ?? null,
					vy: vy ?? null,
					sd: sd ?? null
				}))
			};
		}
		case 'state':
			return { kind: 'state', ...base, ...stateOf(said.message) };
		case 'connection':
			return { kind: 'connection', ...base, status: said.message.status };
	}
}

function stateOf({ tasked, task, mode, paused, estop, charging, battery, localized, errors, software }: State) {
	return {
		tasked,
		task: task
			? {
					id: task.id.toWellFormed(),
					goal: { x: task.goal.x, y: task.goal.y },
					route: task.route?.map(([x, y]) => ({ x, y })) ?? null
				}
			: null,
		mode,
		paused,
		estop,
		charging,
		battery,
		localized,
		errors: errors.map(({ code, level, text }) => ({ code: code.toWellFormed(), level, text: text.toWellFormed() })),
		software: software.toWellFormed()
	};
}

/** An answer with its texts well-formed. */
export const wellFormedAnswer = ({ id, status, text }: Answer): Answer => ({
	id: id.toWellFormed(),
	status,
	...(text === undefined ? {} : { text: text.toWellFormed() })
});
