/** Headers every answer carries. The content security policy of pages is Kit's, see svelte.config.js. */

const ALWAYS: Readonly<Record<string, string>> = {
	'x-content-type-options': 'nosniff',
	'referrer-policy': 'same-origin',
	'cross-origin-opener-policy': 'same-origin',
	'cross-origin-resource-policy': 'same-origin',
	'x-frame-options': 'DENY',
	'permissions-policy': 'accelerometer=(), camera=(), geolocation=(), gyroscope=(), microphone=(), payment=(), usb=()'
};

/** Sets the security headers an answer does not have yet. */
export function secureHeaders(headers: Headers, { https, signedIn }: { https: boolean; signedIn: boolean }): void {
	const wanted: Record<string, string> = { ...ALWAYS };
	// What is not a page has nothing to run and belongs in no frame.
	wanted['content-security-policy'] = "default-src 'none'; frame-ancestors 'none'";
	// A year; common practice.
	if (https) wanted['strict-transport-security'] = 'max-age=31536000; includeSubDomains';
	if (signedIn) wanted['cache-control'] = 'private, no-store';
	for (const [name, value] of Object.entries(wanted)) if (!headers.has(name)) headers.set(name, value);
}
