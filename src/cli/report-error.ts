/** Errors as the command line shows them: one message on stderr, or one JSON object for programs. */
import { CATALOGUE, WindrowError } from '../core/errors.js';
import { hidePasswords } from '../core/log.js';
import { EXIT, type ExitStatus, type Format } from './context.js';

function place({ details }: WindrowError): string {
  const { where, line } = details;
  if (where === undefined) return line === undefined ? '' : `line ${line}: `;
  return line === undefined || where.includes(`:${line}`) ? `${where}: ` : `${where}:${line}: `;
}

/** An error that is not in the catalogue is a fault of the program; its stack is for whoever mends it. */
function unexpected(error: unknown, format: Format): string {
  const message = error instanceof Error ? error.message : String(error);
  const stack = error instanceof Error ? (error.stack ?? '') : '';
  if (format === 'json') return JSON.stringify({ error: { code: 'internal.invariant', message, stack } });
  return `windrow: unexpected error: ${message} (internal.invariant)\n${stack}`;
}

export function errorText(error: unknown, format: Format): string {
  if (!(error instanceof WindrowError)) return hidePasswords(unexpected(error, format));
  const { where, line, found, allowed } = error.details;
  if (format === 'json') {
    const entry = { code: error.code, message: error.message, where, line, found, allowed, retryable: error.retryable };
    return hidePasswords(JSON.stringify({ error: entry }));
  }
  const lines = [
    `windrow: ${place(error)}${error.message} (${error.code})`,
    ...(found === undefined ? [] : [`  found:   ${found}`]),
    ...(allowed === undefined ? [] : [`  allowed: ${allowed}`]),
    ...(CATALOGUE[error.code].retryable ? ['  Trying again may help.'] : []),
  ];
  return hidePasswords(lines.join('\n'));
}

export function exitOf(error: unknown): ExitStatus {
  return error instanceof WindrowError ? error.exit : EXIT.failed;
}

/** Errors of output streams that have been reported where the streams are watched; whoever meets them again says nothing. */
export const TOLD = new WeakSet<object>();
