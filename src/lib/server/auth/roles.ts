/** Who may do what. */

import type { Role } from '../db/schema.ts';

export type { Role } from '../db/schema.ts';
/** All roles, in the order people are told of them. */
export const ROLES = ['display', 'operator', 'maintainer', 'manager', 'admin'] as const satisfies readonly Role[];

export type Purpose = 'read' | 'change';

/** display < operator < maintainer < admin. The manager stands beside this order. */
const RANK: Readonly<Record<Exclude<Role, 'manager'>, number>> = { display: 0, operator: 1, maintainer: 2, admin: 3 };

/**
 * Whether a person may do what `needed` may do. A manager reads everything, but changes only what is a manager's
 * (reports and change notes); nobody but an admin shares that.
 */
export function hasRole(user: { readonly role: Role }, needed: Role, purpose: Purpose = 'change'): boolean {
	if (user.role === 'manager') return purpose === 'read' || needed === 'manager';
	if (needed === 'manager') return user.role === 'admin';
	return RANK[user.role] >= RANK[needed];
}

/** The role a token acts in: its own, as long as its owner still may do all of it; read-only otherwise. */
export const tokenRole = (owner: Role, token: Role): Role => (hasRole({ role: owner }, token) ? token : 'display');
