/** Numbers and times as people read them: with a unit, an honest precision, and words where nothing was measured. */

/** Between a number and its unit, so that no line breaks there. */
const NB = '\u00a0';
const NOT_MEASURED = 'not measured';
const NOT_KNOWN = 'not known';

/** persons/m² to one decimal: a sample from sensors does not carry more. Small but not nothing is "under 0.1". */
export function density(perM2: number | null): string {
	if (perM2 === null || !Number.isFinite(perM2)) return NOT_MEASURED;
	return perM2 > 0 && perM2 < 0.05 ? 'under 0.1/m²' : `${perM2.toFixed(1)}/m²`;
}

/** m/s to the centimetre per second; null is "not measured". */
export function speed(mPerS: number | null): string {
	return mPerS === null || !Number.isFinite(mPerS) ? NOT_MEASURED : `${mPerS.toFixed(2)}${NB}m/s`;
}

/** A share 0…1 as whole per cent; null is "not known". */
export function share(value: number | null): string {
	return value === null || !Number.isFinite(value) ? NOT_KNOWN : `${Math.round(value * 100)}${NB}%`;
}

/** A length in metres, to the decimetre below 100 m. */
export function metres(value: number | null): string {
	if (value === null || !Number.isFinite(value)) return NOT_MEASURED;
	return `${value.toFixed(Math.abs(value) < 100 ? 1 : 0)}${NB}m`;
}

/** An area in whole square metres. */
export const squareMetres = (value: number): string => `${Math.round(value)}${NB}m²`;

/** A duration: `24 s`, `3 min 05 s`, `2 h 10 min`, `4 d 3 h`. Negative durations (crossed clocks) count as 0 s. */
export function age(ms: number): string {
	const s = Math.max(0, Math.floor(ms / 1000));
	const two = (n: number) => String(n).padStart(2, '0');
	if (s < 60) return `${s}${NB}s`;
	if (s < 3600) return `${Math.floor(s / 60)}${NB}min ${two(s % 60)}${NB}s`;
	if (s < 86_400) return `${Math.floor(s / 3600)}${NB}h ${two(Math.floor((s % 3600) / 60))}${NB}min`;
	return `${Math.floor(s / 86_400)}${NB}d ${Math.floor((s % 86_400) / 3600)}${NB}h`;
}

/** A robot's clock against the server's: `0.4 s ahead`, `12.0 s behind`; below 50 ms `in step`. */
export function clockOffset(ms: number | null): string {
	if (ms === null || !Number.isFinite(ms)) return NOT_KNOWN;
	if (Math.abs(ms) < 50) return 'in step';
	const size = Math.abs(ms) / 1000;
	const words = size < 120 ? `${size.toFixed(1)}${NB}s` : age(Math.abs(ms));
	return `${words} ${ms > 0 ? 'ahead' : 'behind'}`;
}

/** `1 person`, `4 people`. */
export const people = (count: number): string => (count === 1 ? `1${NB}person` : `${count}${NB}people`);

/** `1 robot`, `3 robots`: a count with its noun. */
export const counted = (count: number, one: string, many = `${one}s`): string =>
	`${count}${NB}${count === 1 ? one : many}`;

/** Wall clock in the venue: `14:03:12`. */
export const clockTime = (ms: number, timeZone: string): string => formatter('clock', timeZone).format(ms);

/** Day and wall clock in the venue: `Tue 3 Mar, 14:03`. */
export const dayTime = (ms: number, timeZone: string): string => formatter('day', timeZone).format(ms);

/** The same moment in UTC, for a hover: `2026-03-03 14:03:12 UTC`. */
export const utcTime = (ms: number): string => `${new Date(ms).toISOString().slice(0, 19).replace('T', ' ')} UTC`;

/** Short name of the venue's time zone at that moment, for example `GMT` or `CEST`. */
export function zoneName(ms: number, timeZone: string): string {
	const part = formatter('zone', timeZone)
		.formatToParts(ms)
		.find(({ type }) => type === 'timeZoneName');
	return part?.value ?? timeZone;
}

const SHAPES = {
	clock: { hour: '2-digit', minute: '2-digit', second: '2-digit' },
	day: { weekday: 'short', day: 'numeric', month: 'short', hour: '2-digit', minute: '2-digit' },
	zone: { hour: '2-digit', timeZoneName: 'short' }
} as const satisfies Record<string, Intl.DateTimeFormatOptions>;

const formatters = new Map<string, Intl.DateTimeFormat>();

/** Making a formatter costs a thousand times what using it does. */
function formatter(shape: keyof typeof SHAPES, timeZone: string): Intl.DateTimeFormat {
	const key = `${shape} ${timeZone}`;
	let known = formatters.get(key);
	if (!known) {
		known = new Intl.DateTimeFormat('en-GB', { ...SHAPES[shape], hourCycle: 'h23', timeZone });
		formatters.set(key, known);
	}
	return known;
}
