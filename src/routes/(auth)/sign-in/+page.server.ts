import { Failure } from '$lib/domain/failure';
import { readSessionCookie, setSessionCookie } from '$lib/server/auth/cookie';
import { clientAddress } from '$lib/server/http/address';
import { safeNext } from '$lib/server/http/guard';
import { STATUS } from '$lib/server/http/problem';
import { redirect } from '@sveltejs/kit';
import { message, superValidate, type ErrorStatus } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { z } from 'zod';
import type { Actions, PageServerLoad } from './$types';

const Credentials = z.object({
	email: z.string().trim().min(1, 'Enter your mail address.').max(200, 'That is too long for a mail address.'),
	// Whether it has the right length is not said here: this is no help for guessing.
	password: z.string().min(1, 'Enter your password.').max(1000, 'That is too long for a password.')
});

export const load: PageServerLoad = async ({ locals, url }) => {
	if (locals.user !== null) redirect(303, safeNext(url.searchParams.get('next')));
	return { form: await superValidate(zod4(Credentials)) };
};

export const actions: Actions = {
	default: async (event) => {
		const { locals, request, url, cookies, setHeaders } = event;
		const form = await superValidate(request, zod4(Credentials));
		const password = form.data.password;
		// Whatever the outcome, the password does not travel back.
		form.data.password = '';
		if (!form.valid) return message(form, 'Some fields are not filled in.', { status: 400 });
		try {
			const attempt = { email: form.data.email, password, address: clientAddress(event) };
			const { token, expiresAt } = await locals.app.auth.signIn(attempt);
			// Whoever was signed in here before is no more.
			const before = readSessionCookie(cookies, url);
			if (before !== undefined) await locals.app.auth.signOut(before);
			setSessionCookie(cookies, url, token, expiresAt);
		} catch (cause) {
			if (!(cause instanceof Failure)) throw cause;
			const wait = (cause.details as { retry_after_s?: number } | undefined)?.retry_after_s;
			if (wait !== undefined) setHeaders({ 'retry-after': String(wait) });
			return message(form, cause.message, { status: STATUS[cause.code] as ErrorStatus });
		}
		redirect(303, safeNext(url.searchParams.get('next')));
	}
};
