import { describe, expect, it, vi } from 'vitest';
import { listIncidents, queryOf, readIncident } from './api.ts';

describe('queryOf', () => {
	it('leaves out what is not set, and keeps zero', () => {
		expect(queryOf({ floor: 'a b', kind: '', cursor: null, state: undefined, near_x_m: 0 })).toBe(
			'?floor=a+b&near_x_m=0'
		);
	});

	it('is nothing without parameters', () => {
		expect(queryOf({})).toBe('');
	});
});

describe('an answer', () => {
	it('that is no success speaks the server’s own words', async () => {
		const refuse = vi.fn(async () => Response.json({ detail: 'No such incident.' }, { status: 404 }));
		await expect(readIncident('a/b', refuse as typeof fetch)).rejects.toMatchObject({
			status: 404,
			message: 'No such incident.'
		});
		expect(refuse).toHaveBeenCalledWith('/api/v1/incidents/a%2Fb', undefined);
	});

	it('that is not JSON still says what happened', async () => {
		const broken = async () => new Response('<html>', { status: 502 });
		await expect(listIncidents({}, broken as typeof fetch)).rejects.toThrow('The desk answered with 502.');
	});

	it('that never comes is told apart', async () => {
		const down = () => Promise.reject(new TypeError('fetch failed'));
		await expect(listIncidents({}, down as typeof fetch)).rejects.toMatchObject({ status: 0 });
	});
});
