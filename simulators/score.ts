/** `npm run score`: simulated time at Saltmarsh Hall through the real gate and engine, faster than real time, against the truth. */

import { writeFileSync } from 'node:fs';
import { parseArgs } from 'node:util';
import { makeScoreboard, matchEvidence, toMisses, toTable } from './score/report.ts';
import { runScore } from './score/run.ts';
import { isFaultChoice } from './score/scenario.ts';

const HELP = `Usage: npm run score -- --seed S [options]
  --seed S        same seed, same run, same figures (1)
  --hours H       simulated hours, 0.02 to 1000 (1); a whole day has 10
  --out FILE      also write the figures as one JSON object
  --faults WHICH  all or none (all)
  --robots N      robots of the fleet that take part (24)
  --people N      most persons in the venue (as many as in the demo)
  --misses        name every halt that was missed, made up, or taken for something else
  --quiet         no progress lines`;

function fail(message: string): never {
	console.error(message);
	process.exit(1);
}

function readOptions() {
	try {
		return parseArgs({
			options: {
				seed: { type: 'string', default: '1' },
				hours: { type: 'string', default: '1' },
				out: { type: 'string' },
				faults: { type: 'string', default: 'all' },
				robots: { type: 'string', default: '24' },
				people: { type: 'string' },
				misses: { type: 'boolean', default: false },
				quiet: { type: 'boolean', default: false },
				help: { type: 'boolean', default: false }
			}
		}).values;
	} catch (error) {
		return fail(`${(error as Error).message}\n${HELP}`);
	}
}

function readNumber(name: string, text: string, least: number, most: number): number {
	const value = Number(text);
	return value >= least && value <= most ? value : fail(`--${name} must be a number from ${least} to ${most}.`);
}

const values = readOptions();
if (values.help) {
	console.log(HELP);
	process.exit(0);
}
const { faults, people, out } = values;
if (!isFaultChoice(faults)) fail('--faults must be all or none.');
const options = {
	seed: readNumber('seed', values.seed, 0, Number.MAX_SAFE_INTEGER),
	hours: readNumber('hours', values.hours, 0.02, 1000),
	faults,
	robots: Math.round(readNumber('robots', values.robots, 1, 500)),
	people: people === undefined ? null : Math.round(readNumber('people', people, 0, 5000))
};
const began = performance.now();
const wallS = () => (performance.now() - began) / 1000;
const evidence = runScore({
	...options,
	onStep: ({ time }) => {
		if (values.quiet || Math.round(time * 10) % 3000 !== 0) return;
		console.error(`${Math.round(time / 60)} of ${Math.round(options.hours * 60)} minutes, ${wallS().toFixed(0)} s`);
	}
});
const board = {
	...makeScoreboard(options, evidence),
	wall_s: Math.round(wallS() * 10) / 10,
	speed_factor: Math.round((evidence.seconds / wallS()) * 10) / 10
};
if (out) writeFileSync(out, `${JSON.stringify(board, null, '\t')}\n`);
console.log(toTable(board));
if (values.misses) for (const line of toMisses(matchEvidence(evidence))) console.log(line);
console.log(JSON.stringify(board));
