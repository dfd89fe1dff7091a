/**
 * Curves: samples ordered along one axis, one curve for each question and each setting of the other axes. Maps, cuts and boundaries are
 * made from them.
 *
 * Disorder realisations are averaged: samples that differ only in an averaged axis become one point with their mean and standard error,
 * or with their typical value exp<ln x> and its standard error (that of <ln x>, times the value).
 * A point is `doubtful` if any of its samples is; samples without a value don't enter the mean.
 */
import { WindrowError } from '../core/errors.js';
import type { Question } from '../statistics/types.js';
import type { Coordinates, Sample, SampleState } from './samples.js';

export interface CurvePoint {
  readonly x: number | string;
  readonly state: SampleState;
  /** Mean or typical value of the averaged samples; set where state is `value` or `doubtful`. */
  readonly value: number | null;
  /** Its standard error; null with one sample, and for a typical value of 0. */
  readonly error: number | null;
  /** Samples that entered the mean. */
  readonly count: number;
  readonly sensitive: boolean;
}

export interface Curve {
  readonly questionOrdinal: number;
  readonly question: Question;
  readonly resolution: Sample['resolution'];
  /** The other axes. */
  readonly at: Coordinates;
  /** Numbers ascending; words in the order they came. */
  readonly points: readonly CurvePoint[];
}

/** The axis of disorder realisations, averaged over unless told otherwise. */
export const AVERAGED_AXES: readonly string[] = ['realisation'];

/** @throws WindrowError `analysis.axis` */
export function requireAxis(samples: readonly Sample[], axis: string): void {
  const first = samples[0];
  if (first === undefined || axis in first.coordinates) return;
  throw new WindrowError('analysis.axis', 'no such axis in the sweep', {
    found: axis,
    allowed: Object.keys(first.coordinates).join(', '),
  });
}

/** Groups without disturbing the order of first appearance. */
export function groupBy<T>(items: Iterable<T>, key: (item: T) => string): Map<string, T[]> {
  const groups = new Map<string, T[]>();
  for (const item of items) {
    const name = key(item);
    const group = groups.get(name);
    if (group) group.push(item);
    else groups.set(name, [item]);
  }
  return groups;
}

export function ascending(a: number | string, b: number | string): number {
  return typeof a === 'number' && typeof b === 'number' ? a - b : 0;
}

export function otherAxes(coordinates: Coordinates, without: readonly string[]): Coordinates {
  return Object.fromEntries(Object.entries(coordinates).filter(([axis]) => !without.includes(axis)));
}

interface Mean {
  readonly mean: number;
  readonly error: number | null;
}

function meanOf(values: readonly number[]): Mean {
  const count = values.length;
  const mean = values.reduce((sum, value) => sum + value, 0) / count;
  const spread = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  return { mean, error: count > 1 ? Math.sqrt(spread / (count * (count - 1))) : null };
}

function typicalValue(values: readonly number[]): Mean {
  if (values.includes(0)) return { mean: 0, error: null };
  const { mean, error } = meanOf(values.map(Math.log));
  const typical = Math.exp(mean);
  return { mean: typical, error: error === null ? null : typical * error };
}

function averaged(x: number | string, samples: readonly Sample[]): CurvePoint {
  const values = samples.flatMap(({ value }) => (value === null ? [] : [value]));
  const count = values.length;
  const sensitive = samples.some((sample) => sample.sensitive);
  if (count === 0) {
    const states = samples.map(({ state }) => state);
    const state = states.includes('failed') ? 'failed' : states.includes('missing') ? 'missing' : 'undefined-value';
    return { x, state, value: null, error: null, count, sensitive };
  }
  const typical = samples[0]?.average === 'typical';
  // Of a quantity that is negative somewhere there is no logarithm, hence no typical value.
  if (typical && values.some((value) => value < 0)) return { x, state: 'undefined-value', value: null, error: null, count: 0, sensitive };
  const { mean, error } = typical ? typicalValue(values) : meanOf(values);
  return {
    x,
    state: samples.some(({ state }) => state === 'doubtful') ? 'doubtful' : 'value',
    value: mean,
    error,
    count,
    sensitive,
  };
}

/**
 * @param along the axis of the curves, for example 'coupling'
 * @throws WindrowError `analysis.axis` when the samples have no such axis
 */
export function curvesOf(samples: readonly Sample[], along: string, average: readonly string[] = AVERAGED_AXES): Curve[] {
  requireAxis(samples, along);
  const inner = [along, ...average];
  const groups = groupBy(samples, (sample) => JSON.stringify([sample.questionOrdinal, otherAxes(sample.coordinates, inner)]));
  return [...groups.values()]
    .map((group) => {
      const [first] = group as [Sample, ...Sample[]];
      const points = groupBy(group, ({ coordinates }) => JSON.stringify(coordinates[along]));
      return {
        questionOrdinal: first.questionOrdinal,
        question: first.question,
        resolution: group.find(({ resolution }) => resolution !== null)?.resolution ?? null,
        at: otherAxes(first.coordinates, inner),
        points: [...points.values()].map((list) => averaged(list[0].coordinates[along], list)).sort((a, b) => ascending(a.x, b.x)),
      };
    })
    .sort((a, b) => a.questionOrdinal - b.questionOrdinal);
}
