/** Everything that moves on the plan, kept outside the reactive graph: frames come in, the overlay reads it at its own pace. */

import type { LiveField, LiveFrame, LiveHalt, LiveRobot, LiveZone } from '../../contracts/live.ts';
import type { Point } from '../../domain/geometry/types.ts';
import { unpackField } from './field.ts';
import { computeIsoline } from './isolines.ts';
import { computeLabelPoint, containsPoint } from './label-point.ts';
import { Motion } from './motion.ts';
import type { Plan, PlanZone, RobotShape } from './plan.ts';
import { Trails } from './trail.ts';

export interface SceneZone {
	readonly zone: PlanZone;
	readonly label: Point;
	live: LiveZone | null;
	/** Segments where density equals the zone's own threshold: x1, y1, x2, y2, m */
	isoline: readonly number[];
}

export class Scene {
	robots: readonly LiveRobot[] = [];
	halts: readonly LiveHalt[] = [];
	personIds: readonly number[] = [];
	/** Server time of the last frame and the local time it came, ms */
	frameMs = 0;
	receivedMs = 0;
	readonly zones: readonly SceneZone[];
	readonly robotMotion: Motion<string>;
	readonly personMotion: Motion<number>;
	readonly trails = new Trails();
	readonly shapes: ReadonlyMap<string, RobotShape>;

	constructor(
		readonly plan: Plan,
		shapes: readonly RobotShape[],
		still: () => boolean
	) {
		this.shapes = new Map(shapes.map((shape) => [shape.key, shape]));
		this.zones = plan.zones.map((zone) => ({
			zone,
			label: computeLabelPoint(zone.polygon, plan.walkable.holes),
			live: null,
			isoline: []
		}));
		this.robotMotion = new Motion(still);
		this.personMotion = new Motion(still);
	}

	takeFrame(frame: LiveFrame, receivedMs: number): void {
		this.robots = frame.robots;
		this.halts = frame.halts;
		this.frameMs = frame.server_time_ms;
		this.receivedMs = receivedMs;
		this.personIds = frame.persons.map(({ id }) => id);
		this.robotMotion.update(receivedMs, placedRobots(frame.robots));
		this.personMotion.update(
			receivedMs,
			frame.persons.map(({ id, x_m, y_m }) => [id, { x: x_m, y: y_m, heading: NaN }] as const)
		);
		for (const [key, { x, y }] of placedRobots(frame.robots)) this.trails.note(key, x, y, receivedMs);
		const live = new Map(frame.zones.map((zone) => [zone.key, zone]));
		for (const entry of this.zones) entry.live = live.get(entry.zone.key) ?? null;
	}

	takeField(field: LiveField | null): void {
		const cells = field && unpackField(field);
		for (const entry of this.zones) {
			const { threshold, polygon, private: closed } = entry.zone;
			entry.isoline =
				field && cells && threshold !== null && !closed
					? computeIsoline(cells, field, threshold, (x, y) => containsPoint(polygon, x, y))
					: [];
		}
	}

	/** Key of the zone at a point of the floor; where zones overlap, the one listed later. */
	zoneAt({ x, y }: Point): string | null {
		return this.zones.findLast(({ zone }) => containsPoint(zone.polygon, x, y))?.zone.key ?? null;
	}
}

function placedRobots(robots: readonly LiveRobot[]) {
	return robots.flatMap(({ key, x_m, y_m, heading_rad }) =>
		x_m === null || y_m === null ? [] : [[key, { x: x_m, y: y_m, heading: heading_rad ?? NaN }] as const]
	);
}
