/**
 * Refusals: what a sweep document says that is not allowed, and under which key.
 *
 * The checks know key paths, only the reader of a text knows lines; so the checks throw a Refusal and whoever holds the text turns
 * it into the one WindrowError a user sees. Nothing outside src/sweep ever meets a Refusal.
 */
import { closestMatch } from 'leven';
import { WindrowError, type ErrorCode } from '../core/errors.js';

/** From the document's root: keys of mappings and indices of lists. */
export type KeyPath = readonly (string | number)[];

export interface RefusalDetails {
  readonly found?: string;
  readonly allowed?: string;
  readonly cause?: unknown;
}

export class Refusal extends Error {
  readonly code: ErrorCode;
  readonly path: KeyPath;
  readonly details: RefusalDetails;

  constructor(code: ErrorCode, path: KeyPath, message: string, details: RefusalDetails = {}) {
    super(message);
    this.name = 'Refusal';
    this.code = code;
    this.path = path;
    this.details = details;
  }
}

/** A key path as it is printed: `schedules[0].mean`; the whole document is `(document)`. */
export function pathText(path: KeyPath): string {
  if (path.length === 0) return '(document)';
  return path.map((step, i) => (typeof step === 'number' ? `[${step}]` : i === 0 ? step : `.${step}`)).join('');
}

/** A value as it is quoted in a message: one line, at most about sixty characters. */
export function shown(value: unknown): string {
  if (value === undefined || value === null) return 'nothing';
  const text = typeof value === 'number' ? String(value) : (JSON.stringify(value) ?? typeof value);
  return text.length <= 60 ? text : `${text.slice(0, 57)}…`;
}

/** ' (did you mean x?)' when one of the names is near, else nothing. */
export function suggestion(name: string, names: readonly string[]): string {
  const near = closestMatch(name, names, { maxDistance: Math.max(1, Math.floor(name.length / 3)) });
  return near === undefined || near === name ? '' : ` (did you mean ${near}?)`;
}

/** The error a user sees. `file` and `line` are absent where the document did not come from a text. */
export function refusalError(refusal: Refusal, file?: string, line?: number): WindrowError {
  const key = pathText(refusal.path);
  return new WindrowError(refusal.code, `${key}: ${refusal.message}`, {
    key,
    ...(file === undefined ? {} : { where: file }),
    ...(line === undefined ? {} : { line }),
    ...refusal.details,
  });
}
