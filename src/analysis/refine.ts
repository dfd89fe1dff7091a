/**
 * Refinement of boundaries: where the next point has to be for a bracket to become narrower.
 *
 * A bracket is halved. Where doubtful or failed points lie in it, which a boundary leaves out, it is narrowed from both ends towards
 * them: what lies between two such points is as a rule no better. Every point halves a gap wider than asked, so refining ends, after
 * at most two points for each halving: with every bracket as narrow as asked, or as narrow as the points that can't be used let it be.
 */
import { boundaryOf, type BoundaryRule } from './boundary.js';
import type { Curve } from './curves.js';

/** Brackets this much wider than asked, relative, are as wide as asked: halving rounds. */
const ROUNDING = 1e-9;

/** @returns the place on the curve's axis, in its units; null where no bracket is wider than `width` or none can be narrowed */
export function nextPoint(curve: Curve, rule: BoundaryRule, width: number): number | null {
  const { bracket } = boundaryOf(curve, rule);
  if (bracket === null || bracket.high - bracket.low <= width * (1 + ROUNDING)) return null;
  const inside = curve.points.flatMap(({ x }) => (typeof x === 'number' && x >= bracket.low && x <= bracket.high ? [x] : []));
  const lower = { low: bracket.low, high: inside[1] };
  const upper = { low: inside[inside.length - 2], high: bracket.high };
  const widest = lower.high - lower.low >= upper.high - upper.low ? lower : upper;
  if (widest.high - widest.low <= width * (1 + ROUNDING)) return null;
  const middle = Number(((widest.low + widest.high) / 2).toPrecision(15));
  return middle > widest.low && middle < widest.high ? middle : null;
}
