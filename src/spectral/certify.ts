/** An exact count beside the one by weights: which is reported, and what their difference says. */
import type { ModularCount } from './modular-count.js';
import type { Flag, MeasuredPoint, PointFields } from './types.js';

type Doubt = readonly [flag: Flag, reason: string];

/** What the exact count rests on. */
function basisText({ primes, literals }: ModularCount): string {
  const elements = literals === 0 ? '' : `; ${literals} elements are no fractions and stand for their doubles`;
  return `modulo ${primes.join(' and ')}${elements}`;
}

function doubtOf(fields: PointFields, count: ModularCount): Doubt | null {
  const { accessible_dimension: found, accessible_by: by, bright_levels: bright } = fields;
  const exact = count.dimension;
  if (exact === null) return ['uncertified', `accessible_dimension is not counted exactly: ${count.obstacle ?? 'no reason'}`];
  if (exact === bright && exact === found) return null;
  if (by === 'structure')
    return exact === found
      ? null
      : ['doubtful', `the structure of H tells ${found} levels, the exact count ${exact} (${basisText(count)})`];
  const counts = `${bright} levels by weights, ${exact} counted exactly (${basisText(count)})`;
  return exact > bright
    ? ['underresolved', `${counts}: ${exact - bright} are too faint or too close to another for double precision`]
    : ['doubtful', `${counts}: rounding has split levels that are one, or left weight on dark ones`];
}

/**
 * The point with accessible_dimension as counted exactly. Where the structure of H tells it already, that stays, and the count confirms it.
 * The measure is not touched: levels that rounding added stay in it, and the point is marked.
 */
export function certify(measured: MeasuredPoint, count: ModularCount): MeasuredPoint {
  const { fields } = measured;
  const doubt = doubtOf(fields, count);
  const counted =
    count.dimension === null || fields.accessible_by === 'structure'
      ? {}
      : ({ accessible_dimension: count.dimension, accessible_by: 'modular' } as const);
  return {
    ...measured,
    fields: {
      ...fields,
      ...counted,
      flags: doubt === null ? fields.flags : [...new Set([...fields.flags, doubt[0]])],
      flag_reasons: doubt === null ? fields.flag_reasons : [...fields.flag_reasons, doubt[1]],
    },
  };
}
