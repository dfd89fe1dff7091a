/**
 * From zod's issues to one refusal: the key, what was found there, what is allowed, and the likely intention where a name is close.
 */
import type { z } from 'zod';
import { Refusal, shown, suggestion, type KeyPath } from './refusal.js';

type Issue = z.core.$ZodIssue;

/** Keys with an answer of their own: they are asked for often enough, and windrow has decided against them. */
const DECIDED: Readonly<Record<string, string>> = {
  precision: 'every number is computed in double precision; there is nothing to choose',
};

/** Every problem of a document as a refusal, in the order zod found them. */
export function refusals(error: z.ZodError, root: unknown): Refusal[] {
  return error.issues.flatMap((issue) => translate(issue, [], root));
}

function valueAt(root: unknown, path: KeyPath): unknown {
  let value: unknown = root;
  for (const step of path) {
    if (typeof value !== 'object' || value === null) return undefined;
    value = (value as Record<string | number, unknown>)[step];
  }
  return value;
}

function translate(issue: Issue, base: KeyPath, root: unknown): Refusal[] {
  const path: KeyPath = [...base, ...issue.path.map((step) => (typeof step === 'number' ? step : String(step)))];
  const value = valueAt(root, path);
  if (issue.code === 'unrecognized_keys') {
    const names = issue.message.split(', ');
    return issue.keys.map((key) => {
      const decided = DECIDED[key];
      const message = decided === undefined ? `a key that is not known here${suggestion(key, names)}` : `not a key: ${decided}`;
      return new Refusal('sweep.key', [...path, key], message, { found: key, allowed: issue.message });
    });
  }
  if (value === undefined) {
    const allowed = allowedBy(issue);
    return [new Refusal('sweep.key', path, 'a key that is missing', { found: 'nothing', allowed })];
  }
  if (issue.code === 'invalid_union') return union(issue, path, root, value);
  const found = typeof value === 'string' ? shown(value) : value === null ? 'nothing (null)' : shown(value);
  const hint = issue.code === 'invalid_value' && typeof value === 'string' ? suggestion(value, issue.values.map(String)) : '';
  return [new Refusal('sweep.value', path, `a value that is not allowed${hint}`, { found, allowed: allowedBy(issue) })];
}

/** The branch the user meant: one whose form fits and that has the fewest complaints; none fits when all complain at the root. */
function union(issue: Issue & { code: 'invalid_union' }, path: KeyPath, root: unknown, value: unknown): Refusal[] {
  if ('discriminator' in issue && typeof issue.discriminator === 'string') {
    const family = (value as Record<string, unknown>)[issue.discriminator];
    const names = 'options' in issue && Array.isArray(issue.options) ? issue.options.map(String) : [];
    if (family === undefined) {
      return [
        new Refusal('sweep.key', [...path, issue.discriminator], 'a key that is missing', { found: 'nothing', allowed: names.join(', ') }),
      ];
    }
    const hint = typeof family === 'string' ? suggestion(family, names) : '';
    const where = [...path, issue.discriminator];
    return [new Refusal('schedule.unknown', where, `not a schedule family${hint}`, { found: shown(family), allowed: names.join(', ') })];
  }
  let best: { readonly branch: readonly Issue[]; readonly complaints: number } | null = null;
  for (const branch of issue.errors) {
    if (branch.some((one) => one.path.length === 0 && one.code !== 'unrecognized_keys' && !isBound(one))) continue;
    const complaints = branch.reduce((sum, one) => sum + (one.code === 'unrecognized_keys' ? one.keys.length : 1), 0);
    if (best === null || complaints < best.complaints) best = { branch, complaints };
  }
  if (best !== null) return best.branch.flatMap((one) => translate(one, path, root));
  return [new Refusal('sweep.value', path, 'a value that is not allowed', { found: shown(value), allowed: issue.message })];
}

/** A complaint about the value of the right type, not about its type. */
function isBound(issue: Issue): boolean {
  return issue.code === 'too_small' || issue.code === 'too_big' || (issue.code === 'invalid_type' && issue.expected === 'int');
}

const WORDS: Readonly<Record<string, string>> = {
  number: 'a finite number',
  int: 'a whole number',
  string: 'a text',
  array: 'a list',
  object: 'a mapping',
  record: 'a mapping',
  tuple: 'a list of two',
};

function allowedBy(issue: Issue): string {
  switch (issue.code) {
    case 'invalid_type':
      return WORDS[issue.expected] ?? issue.expected;
    case 'too_small':
      return bound(issue.origin, issue.inclusive === false ? 'above' : 'at least', issue.minimum);
    case 'too_big':
      return bound(issue.origin, issue.inclusive === false ? 'below' : 'at most', issue.maximum);
    case 'invalid_value':
      return issue.values.map(String).join(', ');
    case 'invalid_format':
      return issue.format === 'regex'
        ? 'letters, digits, dot, dash and underscore, at most 100, the first a letter or digit'
        : issue.message;
    case 'invalid_union':
    case 'unrecognized_keys':
    case 'invalid_key':
    case 'invalid_element':
    case 'not_multiple_of':
    case 'custom':
      return issue.message;
  }
}

function bound(origin: string, relation: string, limit: number | bigint): string {
  const unit = origin === 'array' ? ' entries' : origin === 'string' ? ' characters' : '';
  return `${relation} ${limit}${unit}`;
}
