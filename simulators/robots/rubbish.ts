/** The sort of nonsense that reaches a real broker: cut-off text, wrong types, wrong units, wrong places. */

import type { Channel } from '../../src/lib/contracts/mqtt.ts';
import type { Random } from '../core/random.ts';

/** Something to send instead of a good message. Text is sent as it is; objects as JSON. */
export function rubbishFor(
	random: Random,
	channel: Channel,
	good: unknown
): { channel: Channel | 'unknown'; payload: unknown } {
	const message = good as Record<string, unknown>;
	const kinds: (() => { channel: Channel | 'unknown'; payload: unknown })[] = [
		() => ({ channel, payload: JSON.stringify(message).slice(0, 20) }),
		() => ({ channel, payload: '' }),
		() => ({ channel, payload: '\u0000\u0001\ufffd not json' }),
		() => ({ channel, payload: JSON.stringify({ ...message, x: null, persons: 'many' }) }),
		// A stamp in seconds instead of milliseconds.
		() => ({ channel, payload: { ...message, t: Number(message.t) / 1000 } }),
		() => ({ channel, payload: { ...message, t: Number(message.t) + 3 * 86_400_000 } }),
		() => ({ channel, payload: { ...message, map: 'somebody-elses-map' } }),
		() => ({ channel, payload: { ...message, seq: 0 } }),
		() => ({ channel, payload: '[1,2,3]' }),
		() => ({ channel: 'unknown', payload: message }),
		() => ({ channel, payload: `{"t":${Number(message.t)},"padding":"${'x'.repeat(200_000)}"}` })
	];
	return random.pick(kinds)();
}
