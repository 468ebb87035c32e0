/** Which of the true halts the desk's own definition calls halts, with the verdict that would have been right. */

import type { HaltRule } from '../../src/lib/domain/halts/halt-rule.ts';
import type { Verdict } from '../../src/lib/domain/room/room.ts';
import type { Agent } from '../robots/agent.ts';
import type { TrueHalt } from '../robots/truth.ts';
import type { World } from '../world.ts';
import type { ExpectedHalt } from './halt-score.ts';
import type { TrueMoments } from './true-moments.ts';

/** m from the goal, beside the robot's radius, at which it has arrived: part of the desk's definition. */
const ARRIVED_M = 0.5;
/** s; a loss of radio begins within one step of the silence that is noted for it */
const SAME_TIME_S = 0.15;

interface Noted {
	readonly truth: TrueHalt;
	readonly verdict: Verdict | null;
	readonly planned: boolean;
}

interface Span {
	readonly robot: string;
	readonly from: number;
	to: number;
}

/** The last few seconds of one robot on one task. */
interface Trail {
	readonly task: string;
	readonly samples: { readonly time: number; readonly remaining: number }[];
}

export class TrueHalts {
	readonly #noted: Noted[] = [];
	/** Faults that came on top of a halt, which the simulation does not note apart. */
	readonly #faults: TrueHalt[] = [];
	readonly #openFault = new Map<string, TrueHalt>();
	/** Times without radio */
	readonly #quiet: Span[] = [];
	/** Times at which a robot truly got on as much as ends a halt by the desk's definition */
	readonly #going: Span[] = [];
	readonly #lastGoing = new Map<string, Span>();
	readonly #trails = new Map<string, Trail>();

	constructor(
		readonly world: World,
		readonly moments: TrueMoments,
		readonly rule: HaltRule
	) {}

	/** Takes what the simulation has noted since; call after every step of the world. */
	step(): void {
		const { truth, agents, time } = this.world;
		for (let i = this.#noted.length; i < truth.halts.length; i++) {
			const halt = truth.halts[i]!;
			const asked = halt.kind !== 'fault' && halt.kind !== 'silent';
			const moment = asked ? this.moments.at(halt.robot, halt.onset) : null;
			this.#noted.push({ truth: halt, verdict: moment?.verdict ?? null, planned: asked && this.#isPlanned(halt) });
		}
		for (const agent of agents) {
			this.#watchRadio(agent, time);
			this.#watchFault(agent, time);
			this.#watchProgress(agent, time);
		}
	}

	/** All true halts in order of onset; call once, at the end. */
	finish(): ExpectedHalt[] {
		const all = [
			...this.#noted,
			...this.#faults.map((truth): Noted => ({ truth, verdict: null, planned: false }))
		].sort((a, b) => a.truth.onset - b.truth.onset);
		const incidents = new Map<string, Pick<TrueHalt, 'end' | 'endedBy'>>();
		return all.map((noted) => {
			const { robot, kind, cause, onset, end, endedBy } = noted.truth;
			const open = incidents.get(robot);
			const goesOn = open !== undefined && this.#goesOn(robot, open, onset);
			const counts = !goesOn && this.#isNoticeable(noted);
			if (counts) incidents.set(robot, { end, endedBy });
			if (goesOn && open.end !== null && (end ?? Infinity) > open.end) incidents.set(robot, { end, endedBy });
			return { robot, kind, cause, onset, end, verdict: noted.verdict, counts };
		});
	}

	/** Whether a halt that begins at `onset` is still the incident before: it lasts, or the robot has not got on since. */
	#goesOn(robot: string, { end, endedBy }: Pick<TrueHalt, 'end' | 'endedBy'>, onset: number): boolean {
		if (end === null || onset <= end) return true;
		return (
			endedBy === 'progress' &&
			!this.#going.some((span) => span.robot === robot && span.from <= onset && span.to >= end)
		);
	}

	#isNoticeable({ truth, planned }: Noted): boolean {
		const { robot, kind, onset, end } = truth;
		const quiet = this.#quiet.filter((span) => span.robot === robot);
		if (kind === 'silent') return quiet.some(({ from }) => Math.abs(from - onset) < SAME_TIME_S);
		if (planned) return false;
		const { windowS, holdS } = this.rule;
		const needed = kind === 'fault' ? 0 : windowS + holdS;
		if ((end ?? this.world.time) - onset < needed) return false;
		return !quiet.some(({ from, to }) => from <= onset + needed && to >= onset);
	}

	#isPlanned({ robot, x, y }: TrueHalt): boolean {
		const vehicle = this.world.agent(robot)!.vehicle;
		const { waitingPlaces } = this.world.floors[vehicle.floor]!.model.floor;
		if (waitingPlaces.some((place) => Math.hypot(place.x - x, place.y - y) <= place.radius)) return true;
		const goal = vehicle.task?.goal;
		return goal !== undefined && Math.hypot(goal.x - x, goal.y - y) <= ARRIVED_M + vehicle.radius;
	}

	#watchRadio({ vehicle, radio }: Agent, time: number): void {
		const robot = vehicle.robot.key;
		const last = this.#quiet.findLast((span) => span.robot === robot);
		const open = last?.to === Infinity;
		if (!radio && !open) this.#quiet.push({ robot, from: time, to: Infinity });
		if (radio && open) last.to = time;
	}

	#watchProgress({ vehicle }: Agent, time: number): void {
		const robot = vehicle.robot.key;
		const remaining = vehicle.remaining();
		if (!vehicle.task || remaining === null) {
			this.#trails.delete(robot);
			return;
		}
		let trail = this.#trails.get(robot);
		if (trail?.task !== vehicle.task.id) this.#trails.set(robot, (trail = { task: vehicle.task.id, samples: [] }));
		const { samples } = trail;
		samples.push({ time, remaining });
		if (time - samples[0]!.time > this.rule.endWindowS + 1e-6) samples.shift();
		if (samples[0]!.remaining - remaining < this.rule.endProgressM) return;
		const last = this.#lastGoing.get(robot);
		if (last && time - last.to < 2 * SAME_TIME_S) last.to = time;
		else {
			const span = { robot, from: time, to: time };
			this.#going.push(span);
			this.#lastGoing.set(robot, span);
		}
	}

	#watchFault({ vehicle }: Agent, time: number): void {
		const robot = vehicle.robot.key;
		const cause = vehicle.faultNow(time);
		const open = this.#openFault.get(robot);
		if (!cause || !vehicle.task) {
			if (open) open.end = time;
			this.#openFault.delete(robot);
			return;
		}
		if (open) return;
		const { x, y } = vehicle;
		const floor = this.world.floors[vehicle.floor]!.model.floor.key;
		const rest = { end: null, endedBy: null, personsWithin2m: 0, nearestPerson: null, wouldYield: null };
		const fault: TrueHalt = { robot, floor, kind: 'fault', cause, onset: time, x, y, ...rest };
		this.#openFault.set(robot, fault);
		const known = this.#noted.some(
			({ truth }) => truth.robot === robot && truth.kind === 'fault' && Math.abs(truth.onset - time) < SAME_TIME_S
		);
		if (!known) this.#faults.push(fault);
	}
}
