/** What every part of a signed-in page may ask for without being handed it: who looks, and at which venue's clock. */

import { createContext } from 'svelte';

export interface Desk {
	/** Venue of the page shown; its time zone is the one all times are written in */
	readonly venue: { readonly key: string; readonly name: string; readonly timeZone: string };
	readonly user: {
		readonly name: string;
		readonly role: string;
		/** False for a wall screen or a manager: they read */
		readonly mayAcknowledge: boolean;
	};
}

/** Given as a function, so that it follows the page without being a store. */
export const [useDesk, provideDesk] = createContext<() => Desk>();
