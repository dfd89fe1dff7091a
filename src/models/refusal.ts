/** Wording shared by the refusals of this room: how a value that was found is shown, and the errors of states and requests. */
import { WindrowError } from '../core/errors.js';
import type { ErrorCode } from '../core/errors.js';

const LONGEST = 80;

/** A value as it stands in a message: JSON where it is JSON, at most 80 characters. */
export function showValue(value: unknown): string {
  let text: string | undefined;
  if (typeof value === 'number' || typeof value === 'bigint' || value === undefined) text = String(value);
  else {
    try {
      text = JSON.stringify(value);
    } catch {
      text = undefined;
    }
  }
  text ??= typeof value;
  return text.length > LONGEST ? `${text.slice(0, LONGEST - 1)}…` : text;
}

/**
 * An error that says where, what was found and what is allowed.
 * @param where key path as in a sweep file, e.g. 'prepare.superposition.1' or 'parameters.J'
 */
export function refusal(code: ErrorCode, message: string, where: string, found: unknown, allowed: string): WindrowError {
  return new WindrowError(code, message, { where, found: showValue(found), allowed });
}
