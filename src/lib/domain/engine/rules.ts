/** Every number the engine decides by, in one place. All are settings; the defaults are ours unless a source is named. */

import type { LevelRule } from '../density/level-of-service.ts';
import { DEFAULT_CAUSE_GROUP_RULE, type CauseGroupRule } from '../halts/cause-groups.ts';
import { DEFAULT_HALT_RULE, type HaltRule } from '../halts/halt-rule.ts';
import { DEFAULT_FLEXIBILITY_RULE, type FlexibilityRule } from '../room/flexibility.ts';
import { DEFAULT_CLOCK_RULE, type ClockRule } from '../tracking/clock.ts';
import { DEFAULT_TRACKER_RULE, type TrackerRule } from '../tracking/person-tracks.ts';

export interface DensityRule {
	/** s between two density results of a floor */
	readonly everyS: number;
	/** s a seen cell counts as observed */
	readonly windowS: number;
	/** 0…1; a zone with less of its walkable floor observed is "not measured" */
	readonly leastCoverage: number;
	/** m; radius R of the Gaussian kernel of the field (not its standard deviation) */
	readonly kernelRadiusM: number;
	/** m; cut-off radius of Voronoi cells */
	readonly cutoffRadiusM: number;
	/** How far and how long a level of service must be passed before its letter changes */
	readonly level: LevelRule;
	/** m; radius of the disc in which density around a robot is taken */
	readonly aroundRadiusM: number;
}

export interface RoomRule {
	/** s; horizon τ of room to move (METHODS default 4 s) */
	readonly horizonS: number;
	/** rad; half-width of the sector round the way ahead */
	readonly sectorRad: number;
	/** m; radius a person is given */
	readonly personRadiusM: number;
	/** s between two evaluations for one robot */
	readonly everyS: number;
}

export interface EngineRules {
	readonly clock: ClockRule;
	readonly tracker: TrackerRule;
	readonly density: DensityRule;
	readonly room: RoomRule;
	readonly halt: HaltRule;
	readonly cause: CauseGroupRule;
	readonly flexibility: FlexibilityRule;
}

export const DEFAULT_RULES: EngineRules = {
	clock: DEFAULT_CLOCK_RULE,
	tracker: DEFAULT_TRACKER_RULE,
	density: {
		everyS: 0.5,
		windowS: 2,
		leastCoverage: 0.3,
		kernelRadiusM: 1,
		cutoffRadiusM: 0.8,
		level: { margin: 0.1, dwell: 5 },
		aroundRadiusM: 3
	},
	room: {
		horizonS: 4,
		sectorRad: (75 * Math.PI) / 180,
		personRadiusM: 0.25,
		everyS: 0.5
	},
	halt: DEFAULT_HALT_RULE,
	cause: DEFAULT_CAUSE_GROUP_RULE,
	flexibility: DEFAULT_FLEXIBILITY_RULE
};
