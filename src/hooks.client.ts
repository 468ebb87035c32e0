import type { HandleClientError } from '@sveltejs/kit';
import { z } from 'zod';

// zod tries out whether it may compile code, which the content security policy forbids and reports.
z.config({ jitless: true });

export const handleError: HandleClientError = ({ error, status, message }) => {
	if (status === 404) return { message };
	console.error(error);
	return { message: 'Something went wrong on this page. Loading it again may help.', code: 'bug' };
};
