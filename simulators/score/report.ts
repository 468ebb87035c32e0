/** The scoreboard of one run: one flat object of figures, and the same as a table. */

import { computeQuantiles } from '../../src/lib/domain/statistics/quantile.ts';
import { COVERAGE_BANDS } from './density-score.ts';
import { countPairs, matchHalts, type DetectedHalt, type ExpectedHalt, type HaltMatches } from './halt-score.ts';
import { WARM_UP_S, type Evidence, type ScoreOptions } from './run.ts';

/** Names and figures; null where there was nothing to measure. Ratios 0…1, units in the names. */
export type Scoreboard = Record<string, number | string | null>;

const KINDS = ['freeze', 'stall', 'dither', 'fault', 'silent'] as const;
/** s before the end in which a halt may begin too late to be noticed. */
const RUN_OUT_S = 12;
const HOURS_PER_WEEK = 168;

const ratio = (part: number, whole: number): number | null => (whole > 0 ? round(part / whole) : null);
const round = (value: number): number => Math.round(value * 1e4) / 1e4;
const rounded = (value: number | null): number | null => (value === null ? null : round(value));

/** Halts that began in the part of the run that is scored; the others may be matched but are not held against anybody. */
export function matchEvidence({ truths, found, seconds }: Evidence): HaltMatches {
	const inTime = ({ onset }: ExpectedHalt | DetectedHalt) => onset >= WARM_UP_S && onset < seconds - RUN_OUT_S;
	const { pairs, missed, falseAlarms } = matchHalts(
		truths.map((truth) => ({ ...truth, counts: truth.counts && inTime(truth) })),
		found
	);
	return { pairs, missed, falseAlarms: falseAlarms.filter(inTime) };
}

/** The figures of a run, without any that depend on the machine. */
export function makeScoreboard(options: ScoreOptions, evidence: Evidence): Scoreboard {
	const { seconds, robots, taskedS, messages, rejected, personsMean } = evidence;
	const robotHours = (robots * (seconds - WARM_UP_S - RUN_OUT_S)) / 3600;
	const matches = matchEvidence(evidence);
	const refused = [...rejected].sort(([a], [b]) => (a < b ? -1 : 1)).map(([reason, n]) => [`rejected_${reason}`, n]);
	return {
		seed: options.seed,
		hours: options.hours,
		faults: options.faults,
		robots,
		persons_mean: Math.round(personsMean),
		...haltFigures(matches),
		false_per_robot_week: round((matches.falseAlarms.length / robotHours) * HOURS_PER_WEEK),
		robot_hours: round(robotHours),
		tasked_robot_hours: round(taskedS / 3600),
		...floorFigures(evidence),
		messages,
		...Object.fromEntries(refused)
	};
}

function haltFigures({ pairs, missed, falseAlarms }: HaltMatches): Scoreboard {
	const counted = pairs.filter(({ truth }) => truth.counts).length;
	const [onsetMedian, onsetP95] = computeQuantiles(
		pairs.map(({ truth, found }) => Math.abs(found.onset - truth.onset)),
		[0.5, 0.95]
	);
	const [delayP50, delayP95] = computeQuantiles(
		pairs.map(({ truth, found }) => found.detectedAt - truth.onset),
		[0.5, 0.95]
	);
	const judged = pairs.filter(({ truth }) => truth.verdict !== null);
	const seen = judged.filter(({ found }) => found.verdict !== 'unseen');
	return {
		halts: counted + missed.length,
		halts_detected: pairs.length + falseAlarms.length,
		halts_optional: pairs.length - counted,
		halts_missed: missed.length,
		false_alarms: falseAlarms.length,
		recall: ratio(counted, counted + missed.length),
		precision: ratio(pairs.length, pairs.length + falseAlarms.length),
		kind_accuracy: ratio(pairs.filter(isKindRight).length, pairs.length),
		verdict_agreement: ratio(seen.filter(({ truth, found }) => truth.verdict === found.verdict).length, seen.length),
		verdict_agreement_open: ratio(
			seen.filter(({ truth, found }) => isOpen(truth) === isOpen(found)).length,
			seen.length
		),
		verdict_unseen: ratio(judged.length - seen.length, judged.length),
		onset_median_s: rounded(onsetMedian ?? null),
		onset_p95_s: rounded(onsetP95 ?? null),
		delay_p50_s: rounded(delayP50 ?? null),
		delay_p95_s: rounded(delayP95 ?? null),
		...Object.assign(
			{},
			...KINDS.map((kind) => {
				const hit = pairs.filter(({ truth }) => truth.kind === kind);
				const due = hit.filter(({ truth }) => truth.counts).length;
				const out = missed.filter((truth) => truth.kind === kind).length;
				const said = pairs.filter(({ found }) => found.kind === kind);
				const wrong = falseAlarms.filter((halt) => halt.kind === kind).length;
				return {
					[`halts_${kind}`]: due + out,
					[`recall_${kind}`]: ratio(due, due + out),
					[`precision_${kind}`]: ratio(said.filter(isKindRight).length, said.length + wrong)
				};
			})
		),
		...named(
			'kind',
			countPairs(pairs, ({ truth, found }) => [truth.kind, found.kind])
		),
		...named(
			'verdict',
			countPairs(judged, ({ truth, found }) => [truth.verdict ?? 'none', found.verdict])
		)
	};
}

const isKindRight = ({ truth, found }: HaltMatches['pairs'][number]): boolean => truth.kind === found.kind;

const isOpen = ({ verdict }: ExpectedHalt | DetectedHalt): boolean => verdict === 'open';

const named = (what: string, counts: ReadonlyMap<string, number>): Scoreboard =>
	Object.fromEntries([...counts].sort(([a], [b]) => (a < b ? -1 : 1)).map(([pair, n]) => [`${what} ${pair}`, n]));

function floorFigures({ density, persons, clockErrors }: Evidence): Scoreboard {
	const high = density.figures(1);
	const { ratio: count, lost, doubled, ghosts, ospa } = persons.figures();
	const [clockMedian, clockP95] = computeQuantiles(
		clockErrors.map((error) => Math.abs(error)),
		[0.5, 0.95]
	);
	return {
		density_bias: rounded(high.bias),
		density_bias_on_seen: rounded(high.biasOnSeen),
		density_bias_classic: rounded(high.biasClassic),
		density_rmse_per_m2: rounded(high.rmse),
		...Object.assign(
			{},
			...COVERAGE_BANDS.map((from, index) => {
				const { results, bias, biasOnSeen, rmse } = density.figures(index, index + 1);
				const band = `${from * 100}_${(COVERAGE_BANDS[index + 1] ?? 1) * 100}`;
				return {
					[`density_results_${band}`]: results,
					[`density_bias_${band}`]: rounded(bias),
					[`density_bias_on_seen_${band}`]: rounded(biasOnSeen),
					[`density_rmse_${band}_per_m2`]: rounded(rmse)
				};
			})
		),
		count_ratio: rounded(count),
		persons_lost: rounded(lost),
		persons_doubled: rounded(doubled),
		persons_ghosts: rounded(ghosts),
		ospa_mean_m: rounded(ospa),
		clock_error_median_ms: rounded(clockMedian ?? null),
		clock_error_p95_ms: rounded(clockP95 ?? null)
	};
}

/** One line per figure. */
export function toTable(board: Scoreboard): string {
	const names = Object.keys(board);
	const width = Math.max(...names.map((name) => name.length));
	return names.map((name) => `${name.padEnd(width)}  ${board[name] ?? 'not measured'}`).join('\n');
}

/** The halts that went wrong, one line each, for whoever wants to know why. */
export function toMisses({ pairs, missed, falseAlarms }: HaltMatches): string[] {
	const s = (time: number | null) => (time === null ? 'open' : time.toFixed(1));
	return [
		...missed.map((h) => `missed ${h.robot} ${h.kind} (${h.cause}) ${s(h.onset)}–${s(h.end)}`),
		...falseAlarms.map(
			(h) => `false ${h.robot} ${h.kind}→${h.lastKind} ${s(h.onset)}–${s(h.end)} noticed ${s(h.detectedAt)}`
		),
		...pairs
			.filter((pair) => !isKindRight(pair))
			.map(
				({ truth, found }) =>
					`kind ${truth.robot} ${truth.kind} (${truth.cause}) called ${found.kind} ${s(truth.onset)}–${s(truth.end)}`
			),
		...pairs
			.filter(({ truth, found }) => Math.abs(found.onset - truth.onset) > 1.5)
			.map(
				({ truth, found }) =>
					`onset ${truth.robot} ${truth.kind}>${found.kind} ${s(truth.onset)} called ${s(found.onset)}`
			)
	];
}
