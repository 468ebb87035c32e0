/** Speed, always beside something else in the same run: `npm run bench [-- domain|engine|ingest …] [--out FILE]`. */

import { writeFileSync } from 'node:fs';
import { densityParts } from './domain-density.ts';
import { roomParts } from './domain-room.ts';
import { statisticsParts } from './domain-statistics.ts';
import { trackingParts } from './domain-tracking.ts';
import { benchEngine } from './engine.ts';
import { benchIngest } from './ingest.ts';
import type { BenchPart } from './part.ts';

const SECTIONS: Record<string, () => unknown> = {
	domain: () => [...densityParts(), ...trackingParts(), ...roomParts(), ...statisticsParts()].map(measure),
	engine: () => report('engine tick', benchEngine()),
	ingest: async () => report('ingest', await benchIngest())
};

/** Median of at least 15 runs or one second, after a warm-up; the two forms take turns so that both meet the same machine. */
function measure({ name, ours, straightforward, target_ms }: BenchPart) {
	const times = { ours: [] as number[], straightforward: [] as number[] };
	const time = (work: () => void): number => {
		const started = performance.now();
		work();
		return performance.now() - started;
	};
	time(ours);
	time(straightforward);
	const until = performance.now() + 1500;
	while (times.ours.length < 15 || (performance.now() < until && times.ours.length < 500)) {
		times.ours.push(time(ours));
		// A slow plain form is measured often enough to be judged, not as often as ours.
		if (times.straightforward.length < 5 || performance.now() < until)
			times.straightforward.push(time(straightforward));
	}
	const [mine, plain] = [median(times.ours), median(times.straightforward)];
	const verdict = mine < target_ms ? 'within' : 'OVER';
	console.log(
		`${name}: ${mine.toFixed(3)} ms (${verdict} ${target_ms} ms), straightforward ${plain.toFixed(3)} ms, ratio ${(plain / mine).toFixed(1)}`
	);
	return { name, ours_ms: mine, straightforward_ms: plain, ratio: plain / mine, target_ms };
}

function report<Result extends object>(title: string, result: Result): Result {
	console.log(`${title}: ${JSON.stringify(result)}`);
	return result;
}

const median = (values: readonly number[]): number => [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)]!;

const args = process.argv.slice(2);
const outAt = args.indexOf('--out');
const out = outAt >= 0 ? args[outAt + 1] : undefined;
const wanted = args.filter((_, index) => outAt < 0 || (index !== outAt && index !== outAt + 1));
const unknown = wanted.filter((name) => !(name in SECTIONS));
if (unknown.length > 0) {
	console.error(`No such part: ${unknown.join(', ')}. There are ${Object.keys(SECTIONS).join(', ')}.`);
	process.exit(2);
}
const results: Record<string, unknown> = {};
for (const [name, section] of Object.entries(SECTIONS)) {
	if (wanted.length > 0 && !wanted.includes(name)) continue;
	console.log(`— ${name}`);
	results[name] = await section();
}
if (out) writeFileSync(out, `${JSON.stringify(results, null, '\t')}\n`);
