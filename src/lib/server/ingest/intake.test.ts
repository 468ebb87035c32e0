import { expect, it } from 'vitest';
import type { RobotObservation } from '../../domain/engine/observation.ts';
import type { Rejection } from './gate.ts';
import { createIntake, type DuplicateCredential } from './intake.ts';

const T = 1_800_000_000_000;
const OWN = 'elbowroom/v1/saltmarsh/porter-01';

function setUp() {
	const seen = {
		observations: [] as RobotObservation[],
		answers: [] as string[],
		rejections: [] as Rejection[],
		findings: [] as DuplicateCredential[]
	};
	const intake = createIntake({
		robots: () => true,
		rejected: { record: (rejection) => void seen.rejections.push(rejection) },
		onObservation: (_venue, observation) => void seen.observations.push(observation),
		onAnswer: (venue, robot, { id }) => void seen.answers.push(`${venue} ${robot} ${id}`),
		onDuplicate: (finding) => void seen.findings.push(finding)
	});
	const pose = (seq: number, atMs: number) => {
		const body = { t: atMs, seq, map: 'ground', x: 0, y: 0, heading: 0, speed: 0 };
		intake.take(`${OWN}/pose`, Buffer.from(JSON.stringify(body)), false, atMs);
	};
	return { intake, seen, pose };
}

it('hands each message to whom it concerns', () => {
	const { intake, seen, pose } = setUp();
	expect(intake.lastMessageAtMs()).toBeNull();
	pose(1, T);
	intake.take(`${OWN}/answer`, Buffer.from('{"id":"c1","status":"seen"}'), false, T + 1);
	intake.take(`${OWN}/pose`, Buffer.from('rubbish'), false, T + 2);
	pose(2, T + 3);
	expect(seen.observations).toHaveLength(2);
	expect(seen.answers).toEqual(['saltmarsh porter-01 c1']);
	expect(seen.rejections.map(({ reason }) => reason)).toEqual(['invalid_json']);
	expect(intake.received()).toBe(4);
	expect(intake.lastMessageAtMs()).toBe(T + 3);
});

it('reports a credential in use twice once, and once more when it is over', () => {
	const { intake, seen, pose } = setUp();
	for (let i = 0; i < 100; i++) pose(i % 2 === 0 ? 9000 + i : i, T + i * 100);
	expect(seen.findings).toMatchObject([{ venue: 'saltmarsh', robot: 'porter-01', active: true }]);
	expect(intake.duplicates()).toEqual(['saltmarsh/porter-01']);
	intake.tick(T + 60_000);
	expect(seen.findings).toHaveLength(1);
	intake.tick(T + 200_000);
	expect(seen.findings[1]).toMatchObject({ active: false, atMs: T + 200_000 });
	expect(intake.duplicates()).toEqual([]);
});
