/** The log: one JSON line per event on standard output, for whoever collects it. */

import { pino, type Logger } from 'pino';

export type Log = Logger;

/** Secrets have no business in a log, wherever they turn up in an object. */
const SECRETS = ['password', 'token', '*.password', '*.token', 'headers.authorization', 'headers.cookie'];

/** @param logLevel one of pino's, as in `Settings` */
export const createLog = ({ logLevel }: { readonly logLevel: string }): Log =>
	pino({ level: logLevel, base: null, redact: SECRETS, timestamp: pino.stdTimeFunctions.isoTime });
