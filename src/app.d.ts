import type { SessionUser } from '$lib/server/auth/sessions';
import type { App as Application } from '$lib/server/app';

declare global {
	namespace App {
		interface Locals {
			app: Application;
			requestId: string;
			/** Both or neither: a session without a user does not exist. */
			user: SessionUser | null;
			sessionId: string | null;
		}
		interface Error {
			message: string;
			code?: string;
			errorId?: string;
		}
	}
}

export {};
