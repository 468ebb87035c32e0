import { expect, it } from 'vitest';
import { leastLag } from './lag.ts';

it('an event that waited on its way is old on arrival', () => {
	let lag: number | null = null;
	lag = leastLag(lag, 10_050, 10_000);
	const stuck = { receivedAt: 18_000, serverTime: 10_200 };
	lag = leastLag(lag, stuck.receivedAt, stuck.serverTime);
	expect(stuck.receivedAt - (stuck.serverTime + lag)).toBe(7750);
});
