import { describe, expect, it } from 'vitest';
import { createRandom } from '../core/random.ts';
import { CLEAN_LINK, Link, type Delivery, type LinkSettings } from './link.ts';

const EPOCH = 1_700_000_000;

function sendMany(settings: Partial<LinkSettings>, reliable: boolean, count = 2000): Delivery[] {
	const link = new Link('r', { ...CLEAN_LINK, ...settings }, { epoch: EPOCH, pace: 1 }, createRandom(1));
	const arrived: Delivery[] = [];
	for (let i = 0; i < count; i++) {
		link.send('pose', i, i * 0.1, reliable);
		link.collect(i * 0.1, arrived);
	}
	link.collect(Infinity, arrived);
	return arrived.sort((a, b) => a.arrivesAt - b.arrivesAt);
}
const order = (arrived: readonly Delivery[]) => arrived.map(({ payload }) => payload as number);

describe('Link', () => {
	it('delivers everything at once and in order when nothing is wrong', () => {
		expect(order(sendMany({}, false))).toEqual(Array.from({ length: 2000 }, (_, i) => i));
	});

	it('loses, doubles and reorders QoS 0 messages at about the share asked for', () => {
		expect(sendMany({ loss: 0.1 }, false).length).toBeLessThan(1880);
		expect(sendMany({ loss: 0.1 }, false).length).toBeGreaterThan(1720);
		expect(sendMany({ duplicate: 0.1 }, false).length).toBeGreaterThan(2120);
		const overtaken = order(sendMany({ reorder: 0.05 }, false));
		expect(overtaken).not.toEqual([...overtaken].sort((a, b) => a - b));
	});

	it('neither loses nor reorders what was promised to arrive', () => {
		const arrived = order(sendMany({ loss: 0.5, reorder: 0.5, jitter: 0.5 }, true));
		expect(arrived).toEqual(Array.from({ length: 2000 }, (_, i) => i));
	});

	it('keeps a clock of its own: offset at once, drift with time', () => {
		const link = new Link(
			'r',
			{ ...CLEAN_LINK, clockOffset: 10, clockDrift: 500 },
			{ epoch: EPOCH, pace: 1 },
			createRandom(3)
		);
		expect(link.stamp(0)).toBe(Math.round((EPOCH + link.offset) * 1000));
		const drifted = (link.stamp(10_000) - link.stamp(0)) / 1000 - 10_000;
		expect(drifted).toBeCloseTo(10_000 * link.drift, 2);
		expect(link.offset).not.toBe(0);
		expect(link.drift).not.toBe(0);
	});

	it('stamps a film played at double speed by the wall clock', () => {
		const link = new Link('r', CLEAN_LINK, { epoch: EPOCH, pace: 2 }, createRandom(3));
		expect(link.stamp(10) - link.stamp(0)).toBe(5000);
	});

	it('numbers each channel by itself and starts again after a restart', () => {
		const link = new Link('r', CLEAN_LINK, { epoch: EPOCH, pace: 1 }, createRandom(3));
		expect([link.nextSequence('pose'), link.nextSequence('pose'), link.nextSequence('people')]).toEqual([0, 1, 0]);
		link.restart();
		expect(link.nextSequence('pose')).toBe(0);
	});
});
