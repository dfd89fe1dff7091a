/** Cuts: curves along one axis, restricted to chosen values of others. */
import { WindrowError } from '../core/errors.js';
import { AVERAGED_AXES, type Curve, curvesOf, requireAxis } from './curves.js';
import type { Coordinates, Sample } from './samples.js';

/** Numbers that agree to this relative accuracy are the same grid value; they may have been typed with fewer digits. */
const SAME = 1e-9;

function same(a: number | string | undefined, b: number | string): boolean {
  if (typeof a === 'number' && typeof b === 'number') return Math.abs(a - b) <= SAME * Math.max(Math.abs(a), Math.abs(b));
  return String(a) === String(b);
}

/** Whether coordinates lie at the given values of some axes. */
export function samePlace(coordinates: Coordinates, at: Coordinates): boolean {
  return Object.entries(at).every(([axis, value]) => same(coordinates[axis], value));
}

/**
 * Samples at given values of some axes.
 * @throws WindrowError `analysis.axis` for an axis the sweep has not, or a value that is not on it
 */
export function samplesAt(samples: readonly Sample[], at: Coordinates): Sample[] {
  let kept = [...samples];
  for (const [axis, value] of Object.entries(at)) {
    requireAxis(samples, axis);
    const found = kept.filter(({ coordinates }) => same(coordinates[axis], value));
    if (found.length === 0 && kept.length > 0) {
      const values = [...new Set(kept.map(({ coordinates }) => coordinates[axis]))];
      const shown = values.slice(0, 40).join(', ') + (values.length > 40 ? ', …' : '');
      throw new WindrowError('analysis.axis', 'no grid point at this value', { where: axis, found: String(value), allowed: shown });
    }
    kept = found;
  }
  return kept;
}

/** A quantity along one axis at given values of others; one curve for each question and each setting of the axes left free. */
export function cutsOf(samples: readonly Sample[], along: string, at: Coordinates = {}, average = AVERAGED_AXES): Curve[] {
  return curvesOf(samplesAt(samples, at), along, average);
}
