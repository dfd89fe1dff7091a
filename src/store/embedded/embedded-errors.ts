/** Failures of files and programs around the embedded server, in windrow's words. */
import { WindrowError } from '../../core/errors.js';

const FULL_CODES = ['ENOSPC', 'EDQUOT', 'EROFS'];
const FULL_TEXT = /No space left on device|Disk quota exceeded|Read-only file system/;

/** A file operation that failed. */
export function fileError(error: unknown, doing: string, where: string): WindrowError {
  const { code, message } = error as NodeJS.ErrnoException;
  const details = { where, found: message, cause: error };
  return FULL_CODES.includes(code ?? '')
    ? new WindrowError('store.full', `cannot ${doing}: the disk is full or read-only`, details)
    : new WindrowError('store.embedded', `cannot ${doing}`, details);
}

/** A program of the server that failed, with what it printed. */
export function programError(program: string, output: string, where: string): WindrowError {
  const details = { where, found: telling(output) };
  return isFull(output)
    ? new WindrowError('store.full', `${program} failed: the disk that holds the store is full or read-only`, details)
    : new WindrowError('store.embedded', `${program} failed`, details);
}

export const isFull = (output: string): boolean => FULL_TEXT.test(output);

/** The lines that say what went wrong, or the last ones. */
function telling(output: string): string {
  const lines = output.split('\n').filter((line) => line.trim() !== '');
  const errors = lines.filter((line) => /\b(FATAL|PANIC|ERROR|error):/.test(line));
  return (errors.length > 0 ? errors : lines).slice(-3).join('; ') || 'no message';
}
