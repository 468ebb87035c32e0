import pino from 'pino';
import { expect, it } from 'vitest';
import { createRefusals } from './refusals.ts';

function setUp() {
	const lines: Record<string, unknown>[] = [];
	const clock = { ms: 0 };
	const log = pino({}, { write: (line: string) => void lines.push(JSON.parse(line) as Record<string, unknown>) });
	return { lines, clock, refusals: createRefusals(log, () => clock.ms) };
}

it('counts everything but logs one line per kind and ten seconds', () => {
	const { lines, clock, refusals } = setUp();
	for (let i = 0; i < 500; i++) refusals.count('login', 'saltmarsh/porter-01');
	refusals.count('publish', 'saltmarsh/porter-01', 'elbowroom/v1/other/robot/pose');
	expect(lines).toHaveLength(2);
	clock.ms = 10_000;
	refusals.count('login', 'saltmarsh/porter-02');
	expect(lines).toHaveLength(3);
	expect(lines[2]).toMatchObject({ refused: 'login', who: 'saltmarsh/porter-02', more: 499 });
	expect(refusals.totals()).toMatchObject({ login: 501, publish: 1, subscribe: 0 });
});

it('says at the end what it has not said', () => {
	const { lines, refusals } = setUp();
	refusals.count('subscribe', 'a');
	refusals.count('subscribe', 'b');
	refusals.stop();
	expect(lines[1]).toMatchObject({ refused: 'subscribe', more: 1 });
});

it('shortens what strangers send', () => {
	const { lines, refusals } = setUp();
	refusals.count('login', 'x'.repeat(60_000));
	expect(String(lines[0]?.who)).toHaveLength(120);
});
