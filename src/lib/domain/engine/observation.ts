/** One thing a robot said, already checked and named in the domain's words. Times in seconds; positions in the robot's own map, metres. */

import type { Ring } from '../geometry/types.ts';

interface Said {
	/** Robot key */
	readonly robot: string;
	/** s since the epoch, server clock, when the message arrived */
	readonly receivedAt: number;
	/** s since the epoch, the robot's own clock */
	readonly robotTime: number;
	/** True for a message the broker had kept from before we subscribed: its arrival says nothing about the robot's clock. */
	readonly retained: boolean;
}

export interface PoseObservation extends Said {
	readonly kind: 'pose';
	readonly map: string;
	readonly x: number;
	readonly y: number;
	/** rad, counter-clockwise from the map's +x */
	readonly heading: number;
	/** m/s, signed along the heading */
	readonly speed: number;
}

export interface PersonSeen {
	/** The robot's own temporary id */
	readonly id: string;
	readonly x: number;
	readonly y: number;
	/** m/s; null when the robot does not estimate it */
	readonly vx: number | null;
	readonly vy: number | null;
	/** Standard deviation of the position, m; null when not given */
	readonly sd: number | null;
}

export interface PeopleObservation extends Said {
	readonly kind: 'people';
	readonly map: string;
	/** m */
	readonly range: number;
	/** rad from the heading, counter-clockwise from → to; null all round */
	readonly fieldOfView: readonly [from: number, to: number] | null;
	/** Part of the view that was not seen; null nothing */
	readonly blocked: Ring | null;
	readonly persons: readonly PersonSeen[];
}

export type Mode = 'automatic' | 'semiautomatic' | 'intervened' | 'manual' | 'service' | 'teach_in' | 'startup';

export interface RobotError {
	readonly code: string;
	readonly level: 'warning' | 'urgent' | 'critical' | 'fatal';
	readonly text: string;
}

export interface Task {
	readonly id: string;
	readonly goal: { readonly x: number; readonly y: number };
	/** Corner points still planned or the whole route; null when the robot sends none */
	readonly route: readonly { readonly x: number; readonly y: number }[] | null;
}

export interface StateObservation extends Said {
	readonly kind: 'state';
	readonly tasked: boolean;
	readonly task: Task | null;
	readonly mode: Mode;
	readonly paused: boolean;
	readonly estop: boolean;
	readonly charging: boolean;
	/** 0…1 */
	readonly battery: number;
	readonly localized: boolean;
	readonly errors: readonly RobotError[];
	readonly software: string;
}

export interface ConnectionObservation extends Said {
	readonly kind: 'connection';
	readonly status: 'online' | 'offline' | 'lost';
}

/** Whether messages can reach us at all. While they cannot, nobody is called silent. */
export interface ListeningObservation {
	readonly kind: 'listening';
	readonly receivedAt: number;
	readonly listening: boolean;
}

/** What a robot said. */
export type RobotObservation = PoseObservation | PeopleObservation | StateObservation | ConnectionObservation;

export type Observation = RobotObservation | ListeningObservation;

/** Why a message was not used. */
export type RejectionReason =
	| 'unknown_topic'
	| 'unknown_robot'
	| 'too_large'
	| 'invalid_json'
	| 'schema'
	| 'out_of_order'
	| 'future'
	| 'past'
	| 'unknown_map';
