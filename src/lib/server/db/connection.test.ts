import { expect, it } from 'vitest';
import { isOlder } from './connection.ts';

it('compares SQLite versions number by number, not letter by letter', () => {
	const versions = ['3.9.0', '3.51.2', '3.51.3', '3.51.10', '3.53', '4.0.0'];
	expect(versions.map((version) => isOlder(version, '3.51.3'))).toEqual([true, true, false, false, false, false]);
});
