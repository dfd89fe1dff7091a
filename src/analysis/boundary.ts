/**
 * Boundaries: the coupling at which an order parameter crosses a stated level or changes most steeply, at one size and schedule.
 *
 * A boundary is a bracket [low, high] of neighbouring couplings of the grid with an estimate inside it, never a bare number. Cells that
 * are doubtful, failed, missing or without a value are left out and counted; where they lie between two usable neighbours the bracket
 * spans them. 'No crossing' and 'too few points' are answers, with words, not errors.
 *
 * The rules `level` and `share` are exact for any curve that is monotone between grid points: the crossing lies inside the bracket.
 * The steepest rule is for smooth quantities (a whole number changes by steps, whose slopes are those of the grid): it takes the pair of neighbours with the greatest slope and places the estimate at the vertex of the parabola through the slopes of that
 * pair and its two neighbours. Units: those of the axis for `low`, `high`, `estimate`.
 */
import type { Question } from '../statistics/types.js';
import type { Coordinates } from './samples.js';
import type { Curve, CurvePoint } from './curves.js';
import { spacingOf } from './spacing.js';

/** `level`: crosses a value; `share`: crosses this share of the greatest value of its curve, which makes sizes comparable; `steepest`. */
export type BoundaryRule =
  { readonly kind: 'level'; readonly level: number } | { readonly kind: 'share'; readonly share: number } | { readonly kind: 'steepest' };

export interface Boundary {
  readonly questionOrdinal: number;
  readonly question: Question;
  /** The other axes of the sweep, size among them. */
  readonly at: Coordinates;
  readonly outcome: 'bracket' | 'no crossing' | 'no change' | 'too few points';
  /** One sentence. */
  readonly words: string;
  /** Set for outcome `bracket`: low ≤ estimate ≤ high, value at low and at high. */
  readonly bracket: {
    readonly low: number;
    readonly high: number;
    readonly estimate: number;
    readonly value_low: number;
    readonly value_high: number;
  } | null;
  /** Brackets that fit the rule; with more than one, the one with the greatest change is given. */
  readonly candidates: number;
  /** Points used, and left out for each reason. */
  readonly used: number;
  readonly left_out: { readonly doubtful: number; readonly failed: number; readonly missing: number; readonly undefined: number };
}

interface Usable {
  readonly x: number;
  readonly y: number;
}
type Finding = Pick<Boundary, 'outcome' | 'words' | 'bracket' | 'candidates'>;

const show = (value: number): string => String(Number(value.toPrecision(6)));

function nothing(outcome: Boundary['outcome'], words: string): Finding {
  return { outcome, words, bracket: null, candidates: 0 };
}

function bracketOf(a: Usable, b: Usable, estimate: number, candidates: number, words: string): Finding {
  const inside = Math.min(b.x, Math.max(a.x, estimate));
  return { outcome: 'bracket', words, candidates, bracket: { low: a.x, high: b.x, estimate: inside, value_low: a.y, value_high: b.y } };
}

function pairs(points: readonly Usable[]): [Usable, Usable][] {
  return points.slice(1).map((point, index) => [points[index], point]);
}

function crossing(points: readonly Usable[], level: number): Finding {
  const [first, last] = [points[0], points.at(-1)];
  if (points.length < 2 || !first || !last) return nothing('too few points', `${points.length} usable point(s); a crossing needs 2`);
  const found = pairs(points).filter(([a, b]) => a.y >= level !== b.y >= level);
  const [start] = found;
  if (!start) {
    const side = first.y >= level ? 'at or above' : 'below';
    return nothing('no crossing', `stays ${side} ${show(level)} from ${show(first.x)} to ${show(last.x)}`);
  }
  const [a, b] = found.reduce((best, pair) => (Math.abs(pair[1].y - pair[0].y) > Math.abs(best[1].y - best[0].y) ? pair : best), start);
  const words =
    found.length === 1
      ? `crosses ${show(level)} once, ${a.y >= level ? 'falling' : 'rising'}`
      : `crosses ${show(level)} ${found.length} times; the greatest change is given`;
  return bracketOf(a, b, a.x + ((level - a.y) / (b.y - a.y)) * (b.x - a.x), found.length, words);
}

/** A change of this size, relative to the largest value, is rounding. */
const FLAT = 1e-12;

function steepest(points: readonly Usable[], logarithmic: boolean): Finding {
  if (points.length < 3) return nothing('too few points', `${points.length} usable point(s); the steepest change needs 3`);
  const to = (x: number): number => (logarithmic ? Math.log(x) : x);
  const from = (position: number): number => (logarithmic ? Math.exp(position) : position);
  const steps = pairs(points).map(([a, b]) => ({
    a,
    b,
    middle: (to(a.x) + to(b.x)) / 2,
    slope: Math.abs((b.y - a.y) / (to(b.x) - to(a.x))),
  }));
  const scale = Math.max(...points.map(({ y }) => Math.abs(y)));
  const change = Math.max(...points.map(({ y }) => y)) - Math.min(...points.map(({ y }) => y));
  if (change <= FLAT * scale) return nothing('no change', `constant at ${show(points[0].y)}`);
  const greatest = Math.max(...steps.map(({ slope }) => slope));
  const best = steps.findIndex(({ slope }) => slope === greatest);
  const candidates = steps.filter(({ slope }) => slope >= greatest * (1 - FLAT)).length;
  const step = steps[best];
  const [before, after] = [steps[best - 1], steps[best + 1]];
  const verb = step.b.y < step.a.y ? 'falls' : 'rises';
  if (!before || !after)
    return bracketOf(step.a, step.b, from(step.middle), candidates, `${verb} most steeply at the edge of the grid; it may lie outside`);
  // Divided differences of the slope; it is greatest at the middle one, so the parabola opens downwards or is flat.
  const left = (step.slope - before.slope) / (step.middle - before.middle);
  const right = (after.slope - step.slope) / (after.middle - step.middle);
  const curvature = (right - left) / (after.middle - before.middle);
  const vertex = curvature < 0 ? (before.middle + step.middle) / 2 - left / (2 * curvature) : step.middle;
  return bracketOf(
    step.a,
    step.b,
    from(vertex),
    candidates,
    `${verb} most steeply here${candidates > 1 ? ` and at ${candidates - 1} more places` : ''}`,
  );
}

function find(points: readonly Usable[], rule: BoundaryRule): Finding {
  switch (rule.kind) {
    case 'level':
      return crossing(points, rule.level);
    case 'share':
      return crossing(points, rule.share * Math.max(...points.map(({ y }) => y)));
    case 'steepest':
      return steepest(points, spacingOf(points.map(({ x }) => x)) === 'log');
  }
}

/** One boundary for each curve along the coupling (or any other numeric axis). */
export function boundaryOf(curve: Curve, rule: BoundaryRule): Boundary {
  const usable = curve.points.filter((point): point is CurvePoint & { x: number; value: number } => {
    return point.state === 'value' && point.value !== null && typeof point.x === 'number';
  });
  const points = usable.map(({ x, value }) => ({ x, y: value }));
  const count = (state: CurvePoint['state']): number => curve.points.filter((point) => point.state === state).length;
  const finding = find(points, rule);
  return {
    questionOrdinal: curve.questionOrdinal,
    question: curve.question,
    at: curve.at,
    ...finding,
    used: points.length,
    left_out: {
      doubtful: count('doubtful'),
      failed: count('failed'),
      missing: count('missing'),
      undefined: count('undefined-value'),
    },
  };
}
