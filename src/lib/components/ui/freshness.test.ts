import { describe, expect, it } from 'vitest';
import { describeFreshness } from './freshness.ts';

const AT = Date.UTC(2026, 2, 3, 14, 3, 12);
const words = (...args: Parameters<typeof describeFreshness>) =>
	describeFreshness(...args).words.replaceAll('\u00a0', ' ');

describe('describeFreshness', () => {
	it('says how long ago while frames come', () => {
		expect(words('open', 400, AT, 'UTC')).toBe('live 0.4 s ago');
	});

	it('calls data old from two seconds on, although the line is open', () => {
		expect(describeFreshness('open', 1999, AT, 'UTC').level).toBe('live');
		expect(describeFreshness('open', 2000, AT, 'UTC').level).toBe('old');
		expect(words('open', 12_300, AT, 'UTC')).toBe('data is 12 s old');
	});

	it('names the last time seen once the connection is gone', () => {
		expect(words('lost', 100, AT, 'UTC')).toBe('no connection, last seen 14:03:12');
		expect(words('signed-out', 100, AT, 'UTC')).toBe('signed out, last seen 14:03:12');
	});

	it('never calls a floor live before its first frame', () => {
		expect(describeFreshness('open', null, null, 'UTC').level).toBe('old');
		expect(words('lost', null, null, 'UTC')).toBe('no connection');
	});
});
