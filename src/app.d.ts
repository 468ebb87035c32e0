import type { App as Application } from '$lib/server/app';
import type { SessionUser } from '$lib/server/auth/sessions';
import type { Credential } from '$lib/server/http/identify';

declare global {
	namespace App {
		interface Locals {
			app: Application;
			requestId: string;
			/** Both or neither: a person comes with a session or a token. */
			user: SessionUser | null;
			credential: Credential | null;
		}
		interface Error {
			message: string;
			code?: string;
			errorId?: string;
		}
	}
}

export {};
