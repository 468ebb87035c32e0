import { Failure } from '$lib/domain/failure';
import { createApiToken, listApiTokens, revokeApiToken } from '$lib/server/auth/api-tokens';
import { hasRole, ROLES } from '$lib/server/auth/roles';
import { STATUS } from '$lib/server/http/problem';
import { requirePageRole } from '$lib/server/http/require-role';
import { fail } from '@sveltejs/kit';
import { z } from 'zod';
import type { Actions, PageServerLoad } from './$types';

const NewToken = z.object({
	name: z.string().trim().min(1, 'Say what the token is for.').max(80, 'At most 80 characters.'),
	role: z.enum(ROLES)
});
const Withdrawal = z.object({ id: z.coerce.number().int().positive() });

export const load: PageServerLoad = async ({ locals }) => {
	const user = requirePageRole(locals, 'display', 'read');
	return {
		tokens: await listApiTokens(locals.app.db, user.id),
		roles: ROLES.filter((role) => hasRole(user, role))
	};
};

export const actions: Actions = {
	create: async ({ locals, request }) => {
		const user = requirePageRole(locals, 'display', 'read');
		const { success, data, error } = NewToken.safeParse(Object.fromEntries(await request.formData()));
		if (!success) return fail(400, { trouble: error.issues[0]?.message ?? 'That cannot be read.' });
		return answer(async () => {
			const { token } = await createApiToken(locals.app.db, { user, ...data, nowMs: Date.now() });
			return { token };
		});
	},
	withdraw: async ({ locals, request }) => {
		const user = requirePageRole(locals, 'display', 'read');
		const { success, data } = Withdrawal.safeParse(Object.fromEntries(await request.formData()));
		if (!success) return fail(400, { trouble: 'That cannot be read.' });
		return answer(async () => {
			await revokeApiToken(locals.app.db, { user, id: data.id, nowMs: Date.now() });
			return {};
		});
	}
};

/** Expected failures become words on the page. */
async function answer<T>(work: () => Promise<T>) {
	try {
		return await work();
	} catch (cause) {
		if (!(cause instanceof Failure)) throw cause;
		return fail(STATUS[cause.code], { trouble: cause.message });
	}
}
