/** What is selected on a floor. It lives in the address (`?select=robot:porter-03`), so that a view can be sent to somebody. */

import type { LiveAlarm, LiveFrame, LiveHalt } from '../contracts/live.ts';

export type SelectionKind = 'robot' | 'zone' | 'incident' | 'alarm';

export interface Selection {
	readonly kind: SelectionKind;
	readonly id: string;
}

/** Everything that one selection lights up: selecting anywhere selects everywhere. */
export interface Related {
	readonly robots: ReadonlySet<string>;
	readonly incidents: ReadonlySet<string>;
	readonly alarms: ReadonlySet<number>;
	readonly zone: string | null;
}

const KINDS: readonly string[] = ['robot', 'zone', 'incident', 'alarm'] satisfies SelectionKind[];
const NOTHING: Related = { robots: new Set(), incidents: new Set(), alarms: new Set(), zone: null };

/** Reads the address parameter; anything that is not a selection is none. */
export function parseSelection(text: string | null): Selection | null {
	const colon = text?.indexOf(':') ?? -1;
	if (!text || colon < 1 || colon === text.length - 1) return null;
	const kind = text.slice(0, colon);
	return KINDS.includes(kind) ? { kind: kind as SelectionKind, id: text.slice(colon + 1) } : null;
}

export const formatSelection = ({ kind, id }: Selection): string => `${kind}:${id}`;

/**
 * What goes with the selection now: an alarm lights its robots and incidents, a robot its open incident and that
 * incident's alarm, an incident both. A zone lights only itself. Names that no longer exist are kept, so that a
 * selection survives a moment without data.
 */
export function relate(selection: Selection | null, frame: LiveFrame | null, alarms: readonly LiveAlarm[]): Related {
	if (!selection) return NOTHING;
	const { kind, id } = selection;
	if (kind === 'zone') return { ...NOTHING, zone: id };

	const robots = new Set<string>();
	const incidents = new Set<string>();
	const alarm = kind === 'alarm' ? alarms.find((one) => String(one.id) === id) : undefined;
	if (kind === 'robot') {
		robots.add(id);
		const open = frame?.robots.find(({ key }) => key === id)?.incident;
		if (open) incidents.add(open);
	}
	if (kind === 'incident') incidents.add(id);
	alarm?.incidents.forEach((incident) => incidents.add(incident));
	alarm?.robots.forEach((robot) => robots.add(robot));
	for (const halt of frame?.halts ?? []) if (incidents.has(halt.incident)) robots.add(halt.robot);

	const related = alarms.filter((one) => one === alarm || one.incidents.some((incident) => incidents.has(incident)));
	return { robots, incidents, alarms: new Set(related.map((one) => one.id)), zone: null };
}

/** Open halts a selection stands for, worst known first as the server sent them. */
export function haltsOf(related: Related, frame: LiveFrame | null): readonly LiveHalt[] {
	return frame?.halts.filter(({ incident }) => related.incidents.has(incident)) ?? [];
}
