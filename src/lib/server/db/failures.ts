/** SQLite's result codes in words an operator can act on. */

import Sqlite from 'better-sqlite3';
import { Failure } from '../../domain/failure.ts';

/** Trouble with the file or the disk, by the start of the result code. Constraint violations are not among them: they are the caller's. */
const SENTENCES: readonly (readonly [code: string, sentence: string])[] = [
	['SQLITE_BUSY', 'The database is busy: another program keeps it locked.'],
	['SQLITE_LOCKED', 'The database is busy: another part of the program keeps it locked.'],
	['SQLITE_FULL', 'The disk is full, so nothing can be stored.'],
	['SQLITE_READONLY', 'The database is read-only: check the rights of the file and its folder.'],
	['SQLITE_CANTOPEN', 'The database file cannot be opened: check the path and the rights of its folder.'],
	['SQLITE_PERM', 'The database file may not be accessed: check its rights.'],
	['SQLITE_IOERR', 'The disk reports errors, so nothing can be stored.'],
	['SQLITE_CORRUPT', 'The database file is damaged: restore a backup.'],
	['SQLITE_NOTADB', 'The file is not an SQLite database.']
];

/** Whether waiting and trying again can help. */
export const isBusy = (cause: unknown): boolean =>
	cause instanceof Sqlite.SqliteError &&
	(cause.code.startsWith('SQLITE_BUSY') || cause.code.startsWith('SQLITE_LOCKED'));

/** Failure 'storage' for a database error of the file or the disk; null for any other error. */
export function storageFailure(cause: unknown, before?: string): Failure | null {
	if (!(cause instanceof Error)) return null;
	const sentence =
		cause instanceof Sqlite.SqliteError
			? SENTENCES.find(([code]) => cause.code.startsWith(code))?.[1]
			: fileSentence(cause as NodeJS.ErrnoException);
	if (sentence === undefined) return null;
	const message =
		before === undefined ? sentence : `${before}: ${sentence.charAt(0).toLowerCase()}${sentence.slice(1)}`;
	return new Failure('storage', message, undefined, { cause });
}

function fileSentence({ code }: NodeJS.ErrnoException): string | undefined {
	switch (code) {
		case 'EACCES':
		case 'EPERM':
		case 'EROFS':
			return 'The folder may not be written: check its rights.';
		case 'ENOSPC':
			return 'The disk is full, so nothing can be stored.';
		case 'ENOTDIR':
		case 'EEXIST':
			return 'A part of its path is a file, not a folder.';
		default:
			return undefined;
	}
}
