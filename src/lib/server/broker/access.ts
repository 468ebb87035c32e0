/** Who may publish and read what. The files for an external Mosquitto (mosquitto-files.ts) say the same in its words. */

import { isChannel, MAX_PAYLOAD_BYTES, parseTopic, TOPIC_PREFIX } from '../../contracts/mqtt.ts';

export type Identity =
	/** The application itself */
	| { readonly kind: 'service' }
	| {
			readonly kind: 'robot';
			/** `{venue}/{robot}` */
			readonly username: string;
			/** Row id of the credential it signed in with */
			readonly credential: number;
	  };

export type Permission =
	| 'granted'
	/** Delivered to those who listen now, never kept for those who come later. */
	| 'not_kept'
	| 'refused';

/** Channels whose last message the broker keeps: what a late reader must know, and what stays true until replaced. */
const KEPT = new Set(['state', 'connection']);

/** Whether a message may be published. A last will is judged by the same rule. */
export function mayPublish(who: Identity, topic: string, retain: boolean, payloadBytes: number): Permission {
	if (who.kind === 'service') {
		// A kept command would be carried out again by every robot that reconnects.
		return parseTopic(topic)?.channel === 'command' && !retain ? 'granted' : 'refused';
	}
	const channel = below(who.username, topic);
	if (channel === null || !isChannel(channel)) return 'refused';
	return !retain || (KEPT.has(channel) && payloadBytes <= MAX_PAYLOAD_BYTES) ? 'granted' : 'not_kept';
}

/** Whether a subscription may be made. Filters are compared as written, so a robot gets no wildcards at all. */
export function maySubscribe(who: Identity, filter: string): boolean {
	if (who.kind === 'service') return filter.startsWith(`${TOPIC_PREFIX}/`);
	return below(who.username, filter) === 'command';
}

function below(username: string, topic: string): string | null {
	const own = `${TOPIC_PREFIX}/${username}/`;
	return topic.startsWith(own) ? topic.slice(own.length) : null;
}
