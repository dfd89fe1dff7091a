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

/** Every problem of a document as a refusal. Missing keys come last: a key that is not known is often the missing one mistyped. */
export function refusals(error: z.ZodError, root: unknown): Refusal[] {
  return missingLast(error.issues.flatMap((issue) => translate(issue, [], root)));
}

export const isMissing = (refusal: Refusal): boolean => refusal.code === 'sweep.key' && refusal.details.found === 'nothing';

const missingLast = (all: readonly Refusal[]): Refusal[] => [...all.filter((one) => !isMissing(one)), ...all.filter(isMissing)];

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
  const hint = issue.code === 'invalid_value' && typeof value === 'string' ? suggestion(value, issue.values.map(String)) : '';
  return [new Refusal('sweep.value', path, `a value that is not allowed${hint}`, { found: shown(value), allowed: allowedBy(issue) })];
}

/** The branch the user meant: one whose form fits and that has the fewest complaints; none fits when all complain at the root. */
function union(issue: Issue & { code: 'invalid_union' }, path: KeyPath, root: unknown, value: unknown): Refusal[] {
  if ('discriminator' in issue) {
    const names = 'options' in issue && Array.isArray(issue.options) ? issue.options.map(String) : [];
    const hint = typeof value === 'string' ? suggestion(value, names) : '';
    return [new Refusal('schedule.unknown', path, `not a schedule family${hint}`, { found: shown(value), allowed: names.join(', ') })];
  }
  let best: { readonly refusals: Refusal[]; readonly complaints: number } | null = null;
  for (const branch of issue.errors.flatMap(branches)) {
    if (branch.some((one) => one.path.length === 0 && one.code !== 'unrecognized_keys' && !isBound(one))) continue;
    const found = missingLast(branch.flatMap((one) => translate(one, path, root)));
    const unknown = branch.flatMap((one) => (one.code === 'unrecognized_keys' ? one.keys : []));
    const guessed = found.some((one) => one.message.includes('did you mean'));
    // None of the keys belongs to this form: it is not what was meant, unless a name is nearly right.
    if (typeof value === 'object' && value !== null && unknown.length === Object.keys(value).length && !guessed) continue;
    const complaints = found.length - (guessed ? 0.5 : 0);
    if (best === null || complaints < best.complaints) best = { refusals: found, complaints };
  }
  if (best !== null) return best.refusals;
  return [new Refusal('sweep.value', path, 'a value that is not allowed', { found: shown(value), allowed: issue.message })];
}

/** A union inside a union offers its own branches. */
function branches(issues: readonly Issue[]): readonly (readonly Issue[])[] {
  const [first] = issues;
  const nested = first?.code === 'invalid_union' && first.path.length === 0 && !('discriminator' in first);
  return nested ? first.errors.flatMap(branches) : [issues];
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
