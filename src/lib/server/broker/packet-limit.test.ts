import fc from 'fast-check';
import { expect, it } from 'vitest';
import { PacketMeter } from './packet-limit.ts';

/** A packet of `size` body bytes; the length field as MQTT 3.1.1 §2.2.3 writes it. */
function packet(size: number): Uint8Array {
	const bytes = [0x30];
	let left = size;
	do {
		bytes.push((left % 128) | (left >= 128 ? 0x80 : 0));
		left = Math.floor(left / 128);
	} while (left > 0);
	return Uint8Array.from([...bytes, ...new Array<number>(size).fill(0xff)]);
}

/** Index of the first packet refused, or −1. */
function firstRefused(sizes: number[], cut: number): number {
	const meter = new PacketMeter(100, 300);
	return sizes.findIndex((size) => {
		const bytes = packet(size);
		for (let at = 0; at < bytes.length; at += cut) if (!meter.admits(bytes.subarray(at, at + cut))) return true;
		return false;
	});
}

it('lets packets up to the limit through, however the stream is cut', () => {
	const sizes = fc.array(fc.integer({ min: 0, max: 299 }), { maxLength: 30 });
	fc.assert(
		fc.property(sizes, fc.integer({ min: 1, max: 50 }), (later, cut) => {
			expect(firstRefused([99, ...later], cut)).toBe(-1);
		})
	);
});

it('refuses the first byte over the limit, however the stream is cut', () => {
	fc.assert(
		fc.property(fc.integer({ min: 300, max: 20_000 }), fc.integer({ min: 1, max: 50 }), (size, cut) => {
			expect(firstRefused([0, 127, 128, size], cut)).toBe(3);
		})
	);
});

it('allows a stranger less than a robot that has signed in', () => {
	expect(firstRefused([100], 7)).toBe(0);
	expect(firstRefused([50, 100], 7)).toBe(-1);
});

it('refuses on the announced length, before the body has come', () => {
	expect(new PacketMeter(100, 300).admits(Uint8Array.of(0x10, 0xff, 0xff, 0xff, 0x7f))).toBe(false);
});

it('refuses a length field that never ends', () => {
	expect(new PacketMeter(1e12, 1e12).admits(Uint8Array.of(0x10, 0x80, 0x80, 0x80, 0x80, 0x01))).toBe(false);
});
