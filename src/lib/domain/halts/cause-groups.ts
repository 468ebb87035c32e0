/** Which halts have one cause? Robots that stop near each other at about the same time share a group and one alarm. */

export interface CauseGroupRule {
	/** m between two halts of one cause */
	readonly withinM: number;
	/** s between the onsets of two halts of one cause */
	readonly withinS: number;
}

/** Chosen by us: about one crowd's extent, and the time a moving crowd takes to reach all robots inside it. */
export const DEFAULT_CAUSE_GROUP_RULE: CauseGroupRule = { withinM: 10, withinS: 20 };

export interface HaltPlace {
	/** Incident id, unique */
	readonly id: string;
	readonly floor: string;
	/** m, floor frame; null for a robot that was never seen anywhere: it stays by itself. */
	readonly x: number | null;
	readonly y: number | null;
	/** s */
	readonly onset: number;
}

export interface CauseGroup {
	/** Derived from the first incident's id, so that a rerun over the same halts gives the same groups. */
	readonly id: string;
	readonly floor: string;
	readonly members: readonly HaltPlace[];
}

/** s after which a group takes no more members even from late detections; bounds the list. */
const KEEP_S = 120;

/**
 * The group of a new halt, and the groups to pass in next time. A halt joins a group when it is within both limits of any
 * member; of several, the one that started first (then by id). Groups are never merged: each has its alarm already.
 * Asking again for a halt that has a group changes nothing.
 */
export function assignCauseGroup(
	groups: readonly CauseGroup[],
	halt: HaltPlace,
	rule: CauseGroupRule = DEFAULT_CAUSE_GROUP_RULE
): { group: string; groups: readonly CauseGroup[] } {
	const known = groups.find((group) => group.members.some((member) => member.id === halt.id));
	if (known) return { group: known.id, groups };

	const kept = groups.filter((group) => lastOnset(group) >= halt.onset - rule.withinS - KEEP_S);
	const [joined] = kept
		.filter((group) => group.floor === halt.floor && group.members.some((member) => isNear(member, halt, rule)))
		.sort((a, b) => firstOnset(a) - firstOnset(b) || (a.id < b.id ? -1 : 1));
	if (!joined) {
		const group = { id: `cause-${halt.id}`, floor: halt.floor, members: [halt] };
		return { group: group.id, groups: [...kept, group] };
	}
	const grown = { ...joined, members: [...joined.members, halt] };
	return { group: joined.id, groups: kept.map((group) => (group === joined ? grown : group)) };
}

function isNear(a: HaltPlace, b: HaltPlace, rule: CauseGroupRule): boolean {
	if (a.x === null || a.y === null || b.x === null || b.y === null) return false;
	return Math.abs(a.onset - b.onset) <= rule.withinS && Math.hypot(a.x - b.x, a.y - b.y) <= rule.withinM;
}

const firstOnset = (group: CauseGroup): number => Math.min(...group.members.map((member) => member.onset));
const lastOnset = (group: CauseGroup): number => Math.max(...group.members.map((member) => member.onset));
