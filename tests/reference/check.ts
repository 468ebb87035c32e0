/** Runs reference cases through the domain: `npm run check:reference -- DIR [--only 01_density,…]`. */

import { readdirSync, readFileSync } from 'node:fs';
import { basename, join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { differences, type Tolerance } from './compare.ts';

export interface ReferenceCase {
	readonly id: string;
	readonly kind: string;
	readonly input: unknown;
	readonly expected: unknown;
	readonly tolerance?: Tolerance;
}

type Handler = (input: unknown) => unknown;

export interface Tally {
	readonly kind: string;
	passed: number;
	total: number;
	readonly complaints: string[];
}

/** Every handler by kind; two handlers for one kind is a mistake of ours and throws. */
export async function loadHandlers(): Promise<Map<string, Handler>> {
	const folder = new URL('./handlers/', import.meta.url);
	const handlers = new Map<string, Handler>();
	for (const file of readdirSync(folder).sort()) {
		if (!file.endsWith('.ts') || file.endsWith('.test.ts')) continue;
		const module = (await import(new URL(file, folder).href)) as { handlers: Record<string, Handler> };
		for (const [kind, handler] of Object.entries(module.handlers)) {
			if (handlers.has(kind)) throw new Error(`Two handlers for kind "${kind}".`);
			handlers.set(kind, handler);
		}
	}
	return handlers;
}

/** One tally per kind, in order of first appearance. A kind without a handler fails all its cases. */
export function runCases(cases: readonly ReferenceCase[], handlers: ReadonlyMap<string, Handler>): Tally[] {
	const tallies = new Map<string, Tally>();
	for (const { id, kind, input, expected, tolerance } of cases) {
		const tally = tallies.get(kind) ?? { kind, passed: 0, total: 0, complaints: [] };
		tallies.set(kind, tally);
		tally.total += 1;
		const handler = handlers.get(kind);
		const found = handler ? attempt(handler, input, expected, tolerance ?? {}) : ['unknown kind'];
		if (found.length === 0) tally.passed += 1;
		else tally.complaints.push(`${id}: ${found.slice(0, 4).join('; ')}`);
	}
	return [...tallies.values()];
}

function attempt(handler: Handler, input: unknown, expected: unknown, tolerance: Tolerance): string[] {
	try {
		return differences(handler(input), expected, tolerance);
	} catch (cause) {
		return [`threw ${String(cause)}`];
	}
}

/** All cases of the JSON files of a folder. Files without `cases` (schemas, notes) are left out. */
export function readCases(folder: string, only: readonly string[] = []): ReferenceCase[] {
	return readdirSync(folder)
		.filter((file) => file.endsWith('.json') && (only.length === 0 || only.includes(basename(file, '.json'))))
		.sort()
		.flatMap((file) => {
			const parsed = JSON.parse(readFileSync(join(folder, file), 'utf8')) as { cases?: ReferenceCase[] };
			return parsed.cases ?? [];
		});
}

async function main(args: readonly string[]): Promise<number> {
	const onlyAt = args.indexOf('--only');
	const only = onlyAt >= 0 ? (args[onlyAt + 1] ?? '').split(',') : [];
	const folder = args.find((arg, index) => !arg.startsWith('--') && (onlyAt < 0 || index !== onlyAt + 1));
	if (!folder) {
		console.error('Say which folder holds the reference files: npm run check:reference -- DIR');
		return 2;
	}
	const tallies = runCases(readCases(folder, only), await loadHandlers());
	for (const { kind, passed, total, complaints } of tallies) {
		console.log(`${kind} ${passed}/${total}`);
		for (const complaint of complaints) console.log(`  ${complaint}`);
	}
	const passed = tallies.reduce((sum, tally) => sum + tally.passed, 0);
	const failed = tallies.reduce((sum, tally) => sum + tally.total, 0) - passed;
	console.log(`${passed} passed, ${failed} failed`);
	return failed === 0 && passed > 0 ? 0 : 1;
}

if (import.meta.url === pathToFileURL(process.argv[1] ?? '').href) process.exitCode = await main(process.argv.slice(2));
