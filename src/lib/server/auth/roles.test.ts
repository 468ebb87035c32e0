import { describe, expect, it } from 'vitest';
import { hasRole, tokenRole, type Role } from './roles.ts';

const ROLES: Role[] = ['display', 'operator', 'maintainer', 'manager', 'admin'];

/** Per role of the user: which needed roles (columns as in ROLES) are granted. */
const CHANGE: Record<Role, string> = {
	display: 'y----',
	operator: 'yy---',
	maintainer: 'yyy--',
	manager: '---y-',
	admin: 'yyyyy'
};
const READ: Record<Role, string> = { ...CHANGE, manager: 'yyyyy' };

describe('roles', () => {
	for (const [purpose, table] of [
		['change', CHANGE],
		['read', READ]
	] as const) {
		it.each(ROLES)(`grant %s exactly their row of the ${purpose} table`, (role) => {
			expect(ROLES.map((needed) => (hasRole({ role }, needed, purpose) ? 'y' : '-')).join('')).toBe(table[role]);
		});
	}

	it('ask for the right to change unless told otherwise', () => {
		expect(hasRole({ role: 'manager' }, 'operator')).toBe(false);
	});

	it('leave a token no more than its owner has now', () => {
		expect(tokenRole('admin', 'operator')).toBe('operator');
		expect(tokenRole('operator', 'admin')).toBe('display');
		expect(tokenRole('manager', 'operator')).toBe('display');
	});
});
