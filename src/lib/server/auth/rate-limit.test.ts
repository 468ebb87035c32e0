import { describe, expect, it } from 'vitest';
import { createRateLimit } from './rate-limit.ts';

describe('rate limit', () => {
	it('allows the limit, then says how long to wait, then allows again', () => {
		const limit = createRateLimit(2, 1000);
		expect([0, 100, 200, 999, 1000].map((at) => limit.take('a', at))).toEqual([0, 0, 800, 1, 0]);
	});

	it('counts each key by itself', () => {
		const limit = createRateLimit(1, 1000);
		expect([limit.take('a', 0), limit.take('b', 0), limit.take('a', 1)]).toEqual([0, 0, 999]);
	});

	it('starts over after a reset', () => {
		const limit = createRateLimit(1, 1000);
		limit.take('a', 0);
		limit.reset('a');
		expect(limit.take('a', 1)).toBe(0);
	});

	it('forgets keys whose window is over', () => {
		const limit = createRateLimit(1, 1000);
		for (let i = 0; i < 100; i++) limit.take(`key ${i}`, i);
		limit.take('later', 1050);
		expect(limit.size).toBe(50);
	});

	it('stays bounded under a flood of keys', () => {
		const limit = createRateLimit(1, 1e9);
		for (let i = 0; i < 25_000; i++) limit.take(`key ${i}`, 0);
		expect(limit.size).toBeLessThanOrEqual(20_001);
	});
});
