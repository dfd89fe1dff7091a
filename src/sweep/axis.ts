/**
 * Axes: how a sweep file writes the values one quantity takes, and the list they stand for.
 *
 * An axis is a single value, a list, `{ values: [...] }`, or a range `{ from, to, count | step, spacing }`. A quantity whose values
 * are lists themselves (on-site energies, measured intervals) takes a plain list as one value; `{ values: [[...], [...]] }` is then
 * the only way to write an axis. Expanded values keep the order of the file and are distinct.
 *
 * Linear ranges are exact: every value is the double nearest to the decimal fraction meant, so `{ from: 0.1, to: 0.5, step: 0.1 }`
 * and `[0.1, 0.2, 0.3, 0.4, 0.5]` are the same axis, with the same identities. Logarithmic ones are rounded to 12 significant
 * digits, so that the last bit of a platform's power function never makes two points of one.
 */
import { z } from 'zod';
import { canonicalJson, type Json } from '../core/json.js';
import { Refusal, shown, type KeyPath } from './refusal.js';

/** An axis after reading: its values, nothing left to compute. It is itself a legal way to write an axis. */
export interface Axis<T> {
  readonly values: readonly T[];
}

/** Values a single axis may have. */
export const AXIS_LIMIT = 1_000_000;

interface Range {
  readonly from: number;
  readonly to: number;
  readonly count?: number | undefined;
  readonly step?: number | undefined;
  readonly spacing?: 'linear' | 'log' | undefined;
}

/** A mapping without unknown keys; the message of a refused key lists the known ones. */
export function mapping<Shape extends z.ZodRawShape>(shape: Shape) {
  return z.strictObject(shape, {
    error: (issue) => (issue.code === 'unrecognized_keys' ? Object.keys(shape).join(', ') : undefined),
  });
}

const rangeShape = {
  from: z.number().describe('first value'),
  to: z.number().describe('last value, at least `from`'),
  count: z.int().min(1).max(AXIS_LIMIT).optional().describe('number of values, both ends included'),
  step: z.number().positive().optional().describe('distance of neighbours; must reach `to` exactly'),
  spacing: z.enum(['linear', 'log']).optional().describe('linear (default), or log with `count` and both ends above 0'),
};

export interface AxisKind {
  /** How one value is named in messages, e.g. 'a number'. */
  readonly one: string;
  /** Values are numbers, so ranges make sense. */
  readonly numeric: boolean;
  /** Values are lists: a plain list is then one value. */
  readonly listValued: boolean;
  /** Further keys of the mapping forms, such as `as`. */
  readonly extra?: z.ZodRawShape;
}

/** The zod schema of an axis over a kind of value. */
export function axisSchema(value: z.ZodType, kind: AxisKind): z.ZodType {
  const extra = kind.extra ?? {};
  const list = z.array(value).min(1).max(AXIS_LIMIT);
  const forms: z.ZodType[] = [value];
  if (!kind.listValued) forms.push(list);
  forms.push(mapping({ values: list.describe('the values, listed'), ...extra }));
  if (kind.numeric) forms.push(mapping({ ...rangeShape, ...extra }));
  const allowed = [
    kind.one,
    ...(kind.listValued ? [] : ['a list of such values']),
    '{ values: [...] }',
    ...(kind.numeric ? ['{ from, to, count | step }'] : []),
  ];
  return z.union(forms as [z.ZodType, ...z.ZodType[]], { error: allowed.join(', ') });
}

/**
 * The values of an axis that has passed its schema.
 * @param listValued as in AxisKind
 * @param check refuses a value that a range produced; listed values have passed the schema already
 * @throws Refusal sweep.value for ranges that do not make sense and for duplicates
 */
export function expandAxis<T extends Json>(
  raw: unknown,
  path: KeyPath,
  listValued: boolean,
  check: (value: T, path: KeyPath) => void = () => undefined,
): readonly T[] {
  if (Array.isArray(raw) && !listValued) return distinct(raw as T[], path);
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw)) return [raw as T];
  if ('values' in raw) return distinct((raw as { values: T[] }).values, [...path, 'values']);
  if (!('from' in raw)) return [raw as T];
  const values = expandRange(raw as Range, path) as readonly unknown[] as readonly T[];
  for (const value of values) check(value, path);
  return distinct(values, path);
}

function distinct<T extends Json>(values: readonly T[], path: KeyPath): readonly T[] {
  const seen = new Set<string>();
  values.forEach((value, index) => {
    const text = canonicalJson(value);
    if (seen.has(text)) {
      throw new Refusal('sweep.value', [...path, index], 'a value that stands there twice', {
        found: shown(value),
        allowed: 'every value once',
      });
    }
    seen.add(text);
  });
  return values;
}

function expandRange(range: Range, path: KeyPath): readonly number[] {
  const { from, to, count, step } = range;
  const refuse = (key: keyof Range | null, message: string, found: string, allowed: string): never => {
    throw new Refusal('sweep.value', key === null ? path : [...path, key], message, { found, allowed });
  };
  if (from > to) refuse('to', 'a range that ends before it begins', `from ${from} to ${to}`, `to ≥ ${from}`);
  if ((count === undefined) === (step === undefined)) {
    refuse(null, 'a range needs either count or step', count === undefined ? 'neither' : 'both', 'exactly one of count, step');
  }
  if (range.spacing === 'log') {
    if (from <= 0) refuse('from', 'a logarithmic range needs positive ends', shown(from), 'above 0');
    if (step !== undefined) refuse('step', 'a logarithmic range has a count, not a step', shown(step), 'count');
  }
  const intervals = count === undefined ? wholeSteps(range as Range & { step: number }, path) : count - 1;
  if (from === to) {
    if (intervals !== 0) refuse('count', 'a range of one value has count 1', shown(count), '1');
    return [from];
  }
  if (intervals === 0) refuse('count', 'a range from one value to another holds at least two', '1', 'at least 2');
  return range.spacing === 'log' ? logarithmic(from, to, intervals) : linear(from, to, intervals);
}

function wholeSteps(range: Range & { step: number }, path: KeyPath): number {
  const { from, to, step } = range;
  const steps = Math.round((to - from) / step);
  if (steps + 1 > AXIS_LIMIT) {
    throw new Refusal('sweep.value', [...path, 'step'], 'a step that gives more values than one axis may have', {
      found: `${steps + 1} values`,
      allowed: `at most ${AXIS_LIMIT}`,
    });
  }
  // 1e-9 of a step is far above the rounding of decimal input and far below anything meant as a difference.
  if (Math.abs((to - from) / step - steps) > 1e-9 * Math.max(1, steps)) {
    const last = from + Math.floor((to - from) / step) * step;
    throw new Refusal('sweep.value', [...path, 'step'], 'a step that does not reach the end of the range', {
      found: `step ${step} from ${from}, last value ${Number(last.toPrecision(12))}`,
      allowed: `a step that reaches ${to}`,
    });
  }
  return steps;
}

/** Digits after the decimal point of the shortest decimal form. */
function decimals(value: number): number {
  const [mantissa = '', exponent = '0'] = String(value).toLowerCase().split('e');
  return Math.max(0, (mantissa.split('.')[1] ?? '').length - Number(exponent));
}

function linear(from: number, to: number, intervals: number): number[] {
  // One division of exact integers is correctly rounded; where they would not be exact, plain interpolation is as good as it gets.
  const scale = 10 ** Math.max(decimals(from), decimals(to));
  const low = Math.round(from * scale);
  const high = Math.round(to * scale);
  const exact = Math.max(Math.abs(low), Math.abs(high), scale) * intervals < Number.MAX_SAFE_INTEGER;
  return Array.from({ length: intervals + 1 }, (_, i) => {
    if (i === 0) return from;
    if (i === intervals) return to;
    if (exact) return (low * (intervals - i) + high * i) / (intervals * scale);
    return from * (1 - i / intervals) + to * (i / intervals);
  });
}

function logarithmic(from: number, to: number, intervals: number): number[] {
  return Array.from({ length: intervals + 1 }, (_, i) => {
    if (i === 0) return from;
    if (i === intervals) return to;
    return Number((from * (to / from) ** (i / intervals)).toPrecision(12));
  });
}
