import { makeScoreboard, matchEvidence, toMisses, toTable } from './report.ts';
import { runScore } from './run.ts';
import { writeFileSync } from 'node:fs';
const [seed, hours, faults, out] = process.argv.slice(2);
const log = new Map<string, string[]>();
let n = 0;
const options = { seed: Number(seed), hours: Number(hours), faults: faults as 'all', robots: 24, people: null };
const ev = runScore({
	...options,
	onStep(world, state) {
		if (n++ % 5) return;
		for (const { vehicle: v, radio } of world.agents) {
			const key = v.robot.key;
			const view = [...state.floors.values()].map((f) => f.robots.get(key)).find(Boolean);
			const m = view?.moments.at(-1);
			const tm = (world as any).__moments?.at(key, world.time);
			const line = `${world.time.toFixed(1)} ${v.phase} ${v.cause} v=${v.speed.toFixed(2)} rem=${v.remaining()?.toFixed(2)} drem=${view?.remaining?.toFixed(2)} trav=${v.travelled.toFixed(1)} goal=${v.task ? Math.hypot(v.task.goal.x - v.x, v.task.goal.y - v.y).toFixed(2) : '-'} at=${v.x.toFixed(2)},${v.y.toFixed(2)} pause=${v.paused} man=${v.isManual(world.time)} fault=${v.faultNow(world.time)} radio=${radio} | open=${view?.open?.kind} alone=${m?.roomAlone?.toFixed(2)} sh=${m?.roomShared?.toFixed(2)} lim=${m?.limitedByPeople} near=${m?.nearestPerson?.toFixed(2)} verdict=${m?.verdict} obs=${m?.observedShare.toFixed(2)}`;
			(log.get(key) ?? log.set(key, []).get(key)!).push(line);
		}
	}
});
const board = makeScoreboard(options, ev);
const m = matchEvidence(ev);
const lines = [toTable(board), ...toMisses(m), '', 'PAIRS'];
for (const { truth: t, found: f } of m.pairs) lines.push(JSON.stringify({ ...t, f }));
lines.push('TRUTHS');
for (const t of ev.truths) lines.push(JSON.stringify(t));
const trace = [];
const ask: [string, number][] = [
	...m.missed.map((h) => [h.robot, h.onset] as [string, number]),
	...m.falseAlarms.map((h) => [h.robot, h.onset] as [string, number]),
	...m.pairs
		.filter(
			({ truth, found }) =>
				truth.kind !== found.kind ||
				Math.abs(truth.onset - found.onset) > 1.5 ||
				(truth.verdict && truth.verdict !== found.verdict)
		)
		.map(({ truth }) => [truth.robot, truth.onset] as [string, number])
];
for (const [robot, t] of ask) {
	trace.push(`== ${robot} ${t.toFixed(1)}`);
	for (const line of log.get(robot)!) {
		const at = Number(line.split(' ')[0]);
		if (at > t - 6 && at < t + 16) trace.push(line);
	}
}
writeFileSync(out!, lines.join('\n') + '\n' + trace.join('\n') + '\n');
console.log(lines[0]);
console.log(toMisses(m).join('\n'));
