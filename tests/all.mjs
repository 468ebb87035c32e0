/** Runs everything on a fresh clone: installs, unit and integration tests, the build, and end-to-end tests in a real browser. */

import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('..', import.meta.url));
const results = mkdtempSync(join(tmpdir(), 'elbowroom-tests-'));
const counts = { passed: 0, failed: 0, skipped: 0 };

/** Runs one command with its output on screen; true when it succeeded. */
function run(title, command, args, env = {}) {
	console.log(`\n— ${title}`);
	const { status } = spawnSync(command, args, {
		cwd: root,
		stdio: 'inherit',
		env: { ...process.env, ...env },
		shell: process.platform === 'win32'
	});
	return status === 0;
}

function stop(message) {
	console.error(`\n${message}`);
	finish(1);
}

function finish(code) {
	rmSync(results, { recursive: true, force: true });
	const skipped = counts.skipped > 0 ? ` (${counts.skipped} skipped, see their reasons above)` : '';
	console.log(`\nAll tests${skipped}:`);
	console.log(`${counts.passed} passed, ${counts.failed} failed`);
	process.exit(code);
}

/** Adds the numbers of a report; a run that ended badly without naming a failed test counts as one failure. */
function add(file, succeeded, read) {
	const found = existsSync(file) ? read(JSON.parse(readFileSync(file, 'utf8'))) : { passed: 0, failed: 0, skipped: 0 };
	if (!succeeded && found.failed === 0) found.failed = 1;
	for (const key of Object.keys(counts)) counts[key] += found[key];
	return found.failed === 0;
}

function vitest(project) {
	const file = join(results, `${project}.json`);
	const args = ['vitest', 'run', '--project', project, '--reporter=default', '--reporter=json'];
	const succeeded = run(`${project} tests`, 'npx', [...args, `--outputFile.json=${file}`]);
	return add(file, succeeded, (report) => ({
		passed: report.numPassedTests,
		failed: report.numFailedTests,
		skipped: report.numPendingTests + (report.numTodoTests ?? 0)
	}));
}

function endToEnd() {
	const file = join(results, 'end-to-end.json');
	const args = ['playwright', 'test', '--config', 'tests/playwright.config.ts', '--reporter=list,json'];
	const succeeded = run('end-to-end tests', 'npx', args, { PLAYWRIGHT_JSON_OUTPUT_FILE: file });
	return add(file, succeeded, ({ stats }) => ({
		passed: stats.expected + stats.flaky,
		failed: stats.unexpected,
		skipped: stats.skipped
	}));
}

if (!existsSync(join(root, 'node_modules', '.package-lock.json'))) {
	if (!run('installing packages', 'npm', ['ci'])) stop('Packages could not be installed.');
}
if (!run('preparing types', 'npx', ['svelte-kit', 'sync'])) stop('SvelteKit could not prepare its types.');

const good = [vitest('unit'), vitest('integration')];
if (run('build', 'npm', ['run', 'build'])) good.push(endToEnd());
else {
	counts.failed += 1;
	good.push(false);
	console.error('The build failed, so no end-to-end test could run.');
}
finish(good.every(Boolean) ? 0 : 1);
