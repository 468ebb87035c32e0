/** `npm run simulate`: the fake fleet of Saltmarsh Hall against a broker. */

import { createWriteStream, readFileSync } from 'node:fs';
import { parseArgs } from 'node:util';
import { startFleet } from './mqtt-fleet.ts';
import { phaseAt } from './crowd/timetable.ts';
import { isScenarioName, SCENARIO_NAMES } from './scenarios.ts';

const HELP = `Usage: npm run simulate -- [options]
  --scenario NAME      ${SCENARIO_NAMES.join(', ')} (day)
  --robots N           robots of the fleet that take part (24)
  --seed S             same seed, same day (1)
  --speed X            simulated seconds per second, 0.1 to 10 (1)
  --url URL            broker; else MQTT_URL, else mqtt://127.0.0.1:1883
  --credentials FILE   JSON of robot key to password (data/demo-robots.json)
  --truth FILE         write what truly happened beside it, one JSON object per line
  --quiet              no progress lines`;

function fail(message: string): never {
	console.error(message);
	process.exit(1);
}

function readOptions() {
	try {
		return parseArgs({
			options: {
				scenario: { type: 'string', default: 'day' },
				robots: { type: 'string', default: '24' },
				seed: { type: 'string', default: '1' },
				speed: { type: 'string', default: '1' },
				url: { type: 'string', default: process.env.MQTT_URL || 'mqtt://127.0.0.1:1883' },
				credentials: { type: 'string', default: 'data/demo-robots.json' },
				truth: { type: 'string' },
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

function readCredentials(file: string): Record<string, string> {
	try {
		return JSON.parse(readFileSync(file, 'utf8')) as Record<string, string>;
	} catch (error) {
		return fail(
			`The robots' credentials cannot be read from ${file} (${(error as Error).message}). Run "npm run seed" first.`
		);
	}
}

const values = readOptions();
if (values.help) {
	console.log(HELP);
	process.exit(0);
}
const { scenario } = values;
if (!isScenarioName(scenario)) fail(`There is no scenario "${scenario}". There are: ${SCENARIO_NAMES.join(', ')}.`);

let troubles = 0;
const fleet = startFleet({
	scenario,
	robots: readNumber('robots', values.robots, 1, 1000),
	seed: readNumber('seed', values.seed, 0, Number.MAX_SAFE_INTEGER),
	speed: readNumber('speed', values.speed, 0.1, 10),
	url: values.url,
	credentials: readCredentials(values.credentials),
	onTrouble: (message) => {
		if (troubles++ < 3) console.error(message);
	}
});
if (fleet.robots.length === 0) fail(`No robot of the fleet has a credential in ${values.credentials}.`);
console.log(`Simulating ${fleet.robots.length} robots in "${scenario}" against ${values.url}.`);

const truth = values.truth ? createWriteStream(values.truth) : null;
let written = 0;
const report = setInterval(() => {
	const { world } = fleet;
	// Halts change until they end, so a line is written once it is over.
	for (; written < fleet.truth.halts.length && fleet.truth.halts[written]!.end !== null; written++) writeHalt(written);
	if (values.quiet || Math.round(world.time) % 60 !== 0) return;
	const people = world.floors.reduce((sum, floor) => sum + floor.people.count, 0);
	const { phase } = phaseAt(world.scenario.timetable, world.time);
	const open = fleet.truth.halts.filter(({ end }) => end === null).map(({ robot, kind }) => `${robot} ${kind}`);
	console.log(`${phase.key}: ${people} people, halted: ${open.join(', ') || 'none'}`);
}, 1000);

function writeHalt(index: number): void {
	const halt = fleet.truth.halts[index]!;
	const times = {
		onset_ms: Math.round(fleet.wallTime(halt.onset)),
		end_ms: halt.end === null ? null : Math.round(fleet.wallTime(halt.end))
	};
	truth?.write(`${JSON.stringify({ ...halt, ...times })}\n`);
}

let stopping = false;
for (const signal of ['SIGINT', 'SIGTERM'] as const) {
	process.on(signal, () => {
		if (stopping) return;
		stopping = true;
		clearInterval(report);
		for (; written < fleet.truth.halts.length; written++) writeHalt(written);
		truth?.end();
		void fleet.stop().then(() => process.exit(0));
	});
}
