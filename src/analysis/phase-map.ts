/**
 * Phase maps: one quantity over two axes, one map for each question and each setting of the other axes.
 *
 * Shape: `cells[row][column]`, row along `y`, column along `x`, both ascending. Where the sweep has no point the cell is `missing`.
 */
import type { Question } from '../statistics/types.js';
import type { Boundary } from './boundary.js';
import { ascending, AVERAGED_AXES, type Curve, type CurvePoint, curvesOf, groupBy, otherAxes, requireAxis } from './curves.js';
import type { Coordinates, Sample } from './samples.js';

export interface PhaseMap {
  readonly questionOrdinal: number;
  readonly question: Question;
  readonly resolution: Sample['resolution'];
  /** The axes that are neither x nor y. */
  readonly at: Coordinates;
  readonly x: { readonly axis: string; readonly values: readonly (number | string)[] };
  readonly y: { readonly axis: string; readonly values: readonly (number | string)[] };
  readonly cells: readonly (readonly CurvePoint[])[];
}

export interface MapAxes {
  readonly x: string;
  readonly y: string;
  /** Values of the sweep's axes, so that cells which nobody has reached yet are there as `missing`; those of the samples when absent. */
  readonly xValues?: readonly (number | string)[];
  readonly yValues?: readonly (number | string)[];
}

const MISSING = { state: 'missing', value: null, error: null, count: 0, sensitive: false } as const;

function distinct(values: Iterable<number | string>): (number | string)[] {
  return [...new Set(values)].sort(ascending);
}

function mapOf(curves: readonly Curve[], axes: MapAxes): PhaseMap {
  const [first] = curves as readonly [Curve, ...Curve[]];
  const xs = distinct([...(axes.xValues ?? []), ...curves.flatMap(({ points }) => points.map(({ x }) => x))]);
  const rows = new Map(curves.map((curve) => [curve.at[axes.y], curve]));
  const ys = distinct([...(axes.yValues ?? []), ...rows.keys()]);
  return {
    questionOrdinal: first.questionOrdinal,
    question: first.question,
    resolution: curves.find(({ resolution }) => resolution !== null)?.resolution ?? null,
    at: otherAxes(first.at, [axes.y]),
    x: { axis: axes.x, values: xs },
    y: { axis: axes.y, values: ys },
    cells: ys.map((y) => {
      const known = new Map(rows.get(y)?.points.map((point) => [point.x, point]));
      return xs.map((x) => known.get(x) ?? { x, ...MISSING });
    }),
  };
}

/** @throws WindrowError `analysis.axis` when the samples lack one of the axes */
export function phaseMapsOf(samples: readonly Sample[], axes: MapAxes, average: readonly string[] = AVERAGED_AXES): PhaseMap[] {
  requireAxis(samples, axes.y);
  const groups = groupBy(curvesOf(samples, axes.x, average), ({ questionOrdinal, at }) =>
    JSON.stringify([questionOrdinal, otherAxes(at, [axes.y])]),
  );
  return [...groups.values()].map((curves) => mapOf(curves, axes));
}

/** The least and greatest trusted value of some maps, so that they share one colour scale; null when there is none. */
export function valueRange(maps: readonly PhaseMap[]): readonly [number, number] | null {
  let low = Infinity;
  let high = -Infinity;
  for (const map of maps)
    for (const row of map.cells)
      for (const { value, state } of row) {
        if (value === null || state !== 'value') continue;
        if (value < low) low = value;
        if (value > high) high = value;
      }
  return low <= high ? [low, high] : null;
}

/** The boundaries that belong to a map, by the value of its y axis. */
export function boundariesOn(map: PhaseMap, boundaries: readonly Boundary[]): Map<number | string, Boundary> {
  const panel = JSON.stringify(map.at);
  return new Map(
    boundaries
      .filter(({ questionOrdinal, at }) => {
        return questionOrdinal === map.questionOrdinal && JSON.stringify(otherAxes(at, [map.y.axis])) === panel;
      })
      .map((boundary) => [boundary.at[map.y.axis], boundary]),
  );
}
