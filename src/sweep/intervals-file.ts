/** Files of measured intervals: numbers, one a line (or separated by blanks or commas), `#` starts a comment. */
import { WindrowError } from '../core/errors.js';
import { INTERVALS_LIMIT } from './schema.js';

/** Bytes of a file of intervals. */
export const INTERVALS_FILE_LIMIT = 16 * 1024 * 1024;

/** Number() would also take 0x10. */
const DECIMAL = /^[\d.eE+-]+$/;

/**
 * The intervals of a file, in its order.
 * @throws WindrowError sweep.value with the line of the first entry that is not a finite number ≥ 0
 */
export function parseIntervals(text: string, file: string): readonly number[] {
  const intervals: number[] = [];
  const refuse = (line: number, message: string, found: string, allowed: string): WindrowError =>
    new WindrowError('sweep.value', message, { where: file, line, key: 'intervals', found, allowed });
  for (const [index, content] of text.split(/\r\n|\r|\n/).entries()) {
    for (const word of content.replace(/#.*$/, '').split(/[\s,;]+/)) {
      if (word === '') continue;
      const value = Number(word);
      if (!Number.isFinite(value) || value < 0 || !DECIMAL.test(word)) {
        throw refuse(index + 1, 'an entry that is not an interval', word.slice(0, 40), 'a finite number of at least 0');
      }
      intervals.push(value);
      if (intervals.length > INTERVALS_LIMIT) {
        throw refuse(index + 1, 'more intervals than a schedule may hold', `more than ${INTERVALS_LIMIT}`, `at most ${INTERVALS_LIMIT}`);
      }
    }
  }
  if (intervals.length === 0) throw refuse(1, 'a file without intervals', 'no number', 'at least one number');
  return intervals;
}
