/** Cuts off a connection that announces a packet too large to be meant well, before anything of it is kept. */

import type { Socket } from 'node:net';
import { MAX_PAYLOAD_BYTES } from '../../contracts/mqtt.ts';

/**
 * Largest MQTT packet that is let through, bytes. Well above MAX_PAYLOAD_BYTES, so that a payload that is merely too
 * large reaches the ingest and is reported there by robot and reason; only beyond this does the connection end.
 */
export const MAX_PACKET_BYTES = 8 * MAX_PAYLOAD_BYTES + 1024;

/** Largest first packet, bytes: names, password and a last will (65,535 bytes at most, MQTT 3.1.1 §3.1.3.3) of somebody not yet known. */
const MAX_CONNECT_BYTES = 100_000;

/** Follows the packet borders in a byte stream (MQTT 3.1.1 §2.2) without keeping a byte. */
export class PacketMeter {
	#limit: number;
	readonly #laterLimit: number;
	#state: 'type' | 'length' | 'body' = 'type';
	#length = 0;
	#lengthBytes = 0;
	#bodyLeft = 0;

	constructor(firstLimit = MAX_CONNECT_BYTES, laterLimit = MAX_PACKET_BYTES) {
		this.#limit = firstLimit;
		this.#laterLimit = laterLimit;
	}

	/** Takes the next piece of the stream; false as soon as a packet announces more than the limit. */
	admits(chunk: Uint8Array): boolean {
		for (let at = 0; at < chunk.length;) {
			if (this.#state === 'body') {
				const step = Math.min(this.#bodyLeft, chunk.length - at);
				at += step;
				this.#bodyLeft -= step;
				if (this.#bodyLeft === 0) this.#next();
			} else if (this.#state === 'type') {
				at++;
				this.#state = 'length';
			} else {
				const byte = chunk[at++] as number;
				this.#length += (byte & 0x7f) * 128 ** this.#lengthBytes++;
				if (1 + this.#length > this.#limit || this.#lengthBytes > 4) return false;
				if (byte < 0x80) this.#beginBody();
			}
		}
		return true;
	}

	#beginBody(): void {
		this.#bodyLeft = this.#length;
		if (this.#length === 0) this.#next();
		else this.#state = 'body';
	}

	#next(): void {
		this.#state = 'type';
		this.#length = 0;
		this.#lengthBytes = 0;
		this.#limit = this.#laterLimit;
	}
}

/** Destroys `socket` with an error once a packet exceeds the limit. For readers that call `socket.read()`. */
export function limitPackets(socket: Socket, meter = new PacketMeter()): void {
	const read = socket.read.bind(socket);
	socket.read = (size?: number) => {
		const chunk = read(size) as Buffer | null;
		if (chunk === null || meter.admits(chunk)) return chunk;
		socket.destroy(new Error('packet too large'));
		return null;
	};
}
