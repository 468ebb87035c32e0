/** When does a robot count as halted? Settings of one venue or robot model; all defaults are chosen by us. */

/** Times in s, lengths in m, speeds in m/s, shares 0…1. `HALT_RULE_RANGES` bounds every number. */
export interface HaltRule {
	/** s over which progress is measured. Longer: fewer alarms for slow traffic, later alarms. */
	readonly windowS: number;
	/** m of progress in `windowS` below which a robot is not getting on. */
	readonly minProgressM: number;
	/** s the lack of progress must last before it is called a halt. */
	readonly holdS: number;
	/** m of progress within `endWindowS` that end a halt; more than `minProgressM`, so that a halt does not flap. */
	readonly endProgressM: number;
	/** s within which `endProgressM` must be made. */
	readonly endWindowS: number;
	/** s without a pose after which a tasked robot is silent. */
	readonly silentAfterS: number;
	/** m driven in `windowS` without progress that make a halt a dither. */
	readonly ditherPathM: number;
	/** m; shorter movements do not count as driving, so localisation jitter of a standing robot adds no path. */
	readonly ditherStepM: number;
	/** m from the robot within which a person counts as near. */
	readonly personNearM: number;
	/** s before onset in which people near the robot make a halt a freeze. */
	readonly beforeOnsetS: number;
	/** m/s toward the goal; a robot with less room alone than this cannot go. */
	readonly goSpeed: number;
	/** s a robot may stand to let somebody pass; shorter stops are never a halt. */
	readonly plannedYieldS: number;
	/** s; across a longer gap in the poses a robot that moved has made an unknown amount of progress. */
	readonly maxGapS: number;
	/** Share of the reachable disc that must be observed before a verdict other than `unseen` is given. */
	readonly leastObservedShare: number;
}

export const DEFAULT_HALT_RULE: HaltRule = {
	windowS: 6,
	minProgressM: 0.3,
	holdS: 2,
	endProgressM: 0.6,
	endWindowS: 4,
	silentAfterS: 3,
	ditherPathM: 1.5,
	ditherStepM: 0.25,
	personNearM: 3,
	beforeOnsetS: 2,
	goSpeed: 0.25,
	plannedYieldS: 4,
	maxGapS: 1,
	leastObservedShare: 0.3
};

export interface SettingRange {
	readonly unit: 's' | 'm' | 'm/s' | 'share';
	readonly min: number;
	readonly max: number;
}

/** Unit and permitted range (both ends included) of every setting of a rule. */
export const HALT_RULE_RANGES: Readonly<Record<keyof HaltRule, SettingRange>> = {
	windowS: { unit: 's', min: 2, max: 60 },
	minProgressM: { unit: 'm', min: 0.05, max: 5 },
	holdS: { unit: 's', min: 0, max: 60 },
	endProgressM: { unit: 'm', min: 0.1, max: 10 },
	endWindowS: { unit: 's', min: 1, max: 60 },
	silentAfterS: { unit: 's', min: 1, max: 120 },
	ditherPathM: { unit: 'm', min: 0.5, max: 50 },
	ditherStepM: { unit: 'm', min: 0.05, max: 1 },
	personNearM: { unit: 'm', min: 0.5, max: 10 },
	beforeOnsetS: { unit: 's', min: 0, max: 30 },
	goSpeed: { unit: 'm/s', min: 0.05, max: 1 },
	plannedYieldS: { unit: 's', min: 0, max: 60 },
	maxGapS: { unit: 's', min: 0.5, max: 10 },
	leastObservedShare: { unit: 'share', min: 0, max: 1 }
};
