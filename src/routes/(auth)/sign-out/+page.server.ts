import { deleteSessionCookie, readSessionCookie } from '$lib/server/auth/cookie';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types';

/** Only a POST signs out: an address that does could be put into any page's image. */
export const load: PageServerLoad = () => redirect(303, '/');

export const actions: Actions = {
	default: async ({ locals, cookies, url }) => {
		const token = readSessionCookie(cookies, url);
		if (token !== undefined) await locals.app.auth.signOut(token);
		deleteSessionCookie(cookies, url);
		redirect(303, '/sign-in');
	}
};
