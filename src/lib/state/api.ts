/** Requests to the desk's own API from the browser. An answer that is not a success becomes an error with the server's words. */

import type { AlarmPage, IncidentDetail, IncidentPage, RejectedMessages, RobotList } from '../contracts/api.ts';
import type { LiveAlarm, LiveFrame, LiveHealth } from '../contracts/live.ts';

type Fetch = typeof fetch;
type Query = Readonly<Record<string, string | number | null | undefined>>;

/** An answer other than 2xx; `message` is a sentence for the reader. */
export class AnswerError extends Error {
	override readonly name = 'AnswerError';

	constructor(
		readonly status: number,
		message: string
	) {
		super(message);
	}
}

export const listIncidents = (query: Query, using: Fetch = fetch) => get<IncidentPage>('/incidents', query, using);
export const listAlarms = (query: Query, using: Fetch = fetch) => get<AlarmPage>('/alarms', query, using);
export const listRejected = (query: Query, using: Fetch = fetch) =>
	get<RejectedMessages>('/rejected-messages', query, using);
export const listRobots = (using: Fetch = fetch) => get<RobotList>('/robots', {}, using);
export const readHealth = (using: Fetch = fetch) => get<LiveHealth>('/health', {}, using);
export const readIncident = (id: string, using: Fetch = fetch) =>
	get<IncidentDetail>(`/incidents/${encodeURIComponent(id)}`, {}, using);

/** Acknowledges an alarm; a second time changes nothing and answers with the first. */
export function acknowledgeAlarm(id: number): Promise<LiveAlarm> {
	return ask<LiveAlarm>(`/alarms/${id}/acknowledge`, fetch, {
		method: 'POST',
		headers: { 'content-type': 'application/json' },
		body: '{}'
	});
}

/** The newest picture of a floor, for pages that do not follow it live. */
export const readFrame = (floor: string, using: Fetch = fetch) =>
	get<LiveFrame>(`/floors/${encodeURIComponent(floor)}/frame`, {}, using);

/** People of a venue are learned about anew; the answer comes before it is done. */
export function forgetFlexibility(venue: string): Promise<null> {
	return ask<null>(`/venues/${encodeURIComponent(venue)}/flexibility/forget`, fetch, {
		method: 'POST',
		headers: { 'content-type': 'application/json' },
		body: '{}'
	});
}

/** The query part of an address without what is empty. */
export function queryOf(query: Query): string {
	const given = Object.entries(query).filter(([, value]) => value !== null && value !== undefined && value !== '');
	return given.length ? `?${new URLSearchParams(given.map(([name, value]) => [name, String(value)]))}` : '';
}

const get = <T>(path: string, query: Query, using: Fetch) => ask<T>(path + queryOf(query), using);

async function ask<T>(path: string, using: Fetch, init?: RequestInit): Promise<T> {
	let answer: Response;
	try {
		answer = await using(`/api/v1${path}`, init);
	} catch {
		throw new AnswerError(0, 'The desk cannot be reached.');
	}
	const body = (await answer.json().catch(() => null)) as { detail?: string } | null;
	if (!answer.ok) throw new AnswerError(answer.status, body?.detail ?? `The desk answered with ${answer.status}.`);
	return body as T;
}
