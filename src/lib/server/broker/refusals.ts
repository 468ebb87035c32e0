/** Counts what the broker refuses and logs it without letting a noisy client fill the log. */

import type { Logger } from 'pino';

/** At most one line per kind in this time; the rest is summed up in the next. */
const QUIET_MS = 10_000;
const MAX_TEXT = 120;

export type RefusalKind = 'login' | 'publish' | 'subscribe' | 'connection' | 'revoked';

export interface Refusals {
	/** `who` and `detail` come from the network and are shortened. */
	count(kind: RefusalKind, who: string | undefined, detail?: string): void;
	totals(): Readonly<Record<RefusalKind, number>>;
	stop(): void;
}

/** Starts all counts at zero. `stop()` logs what was not logged yet. */
export function createRefusals(log: Logger, now: () => number = Date.now): Refusals {
	const totals: Record<RefusalKind, number> = { login: 0, publish: 0, subscribe: 0, connection: 0, revoked: 0 };
	const unsaid = new Map<RefusalKind, number>();
	const quietUntil = new Map<RefusalKind, number>();

	return {
		count(kind, who, detail) {
			totals[kind]++;
			if (now() < (quietUntil.get(kind) ?? 0)) {
				unsaid.set(kind, (unsaid.get(kind) ?? 0) + 1);
				return;
			}
			quietUntil.set(kind, now() + QUIET_MS);
			const more = unsaid.get(kind) ?? 0;
			unsaid.delete(kind);
			log.warn({ refused: kind, who: shorten(who), detail: shorten(detail), more }, 'broker refused');
		},
		totals: () => ({ ...totals }),
		stop() {
			for (const [kind, more] of unsaid) log.warn({ refused: kind, more }, 'broker refused');
			unsaid.clear();
		}
	};
}

const shorten = (text: string | undefined): string | undefined => text?.slice(0, MAX_TEXT);
