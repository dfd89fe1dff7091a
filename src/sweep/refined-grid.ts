/**
 * Refined grids: points between those of a sweep file's grid, at couplings that are not on its axis.
 *
 * They are made like any point of the grid, so an axis that had the coupling would give the same identity. In a sweep their ordinals
 * follow those of the grid; where a point stands among them says only when it was asked for.
 */
import type { SweepDocument } from './document.js';
import { expandGrid } from './grid.js';
import type { Grid, GridPoint } from './types.js';

/** A place on every axis but those that are averaged over. */
export interface RefinedPlace {
  readonly coupling: number;
  /** The other axes, size among them; those that are absent take all their values. */
  readonly at: { readonly [axis: string]: number | string };
}

/** Points of a place: one for each setting of the axes it leaves open, in the grid's order, their ordinals from `first` on. */
export function refinedPoints(document: SweepDocument, { coupling, at }: RefinedPlace, first: number): GridPoint[] {
  const size = typeof at['size'] === 'number' ? { size: { values: [at['size']] } } : {};
  const grid = expandGrid({ ...document, ...size, coupling: { ...document.coupling, values: [coupling] } });
  return [...grid.iterate()]
    .filter(({ coordinates }) => Object.entries(at).every(([axis, value]) => coordinates[axis] === value))
    .map((point, index) => ({ ...point, ordinal: first + index }));
}

/** The grid with points after its own. */
export function refinedGrid(grid: Grid, refined: readonly GridPoint[]): Grid {
  if (refined.length === 0) return grid;
  const after = new Map(refined.map((point) => [point.ordinal, point]));
  const points = grid.points + refined.length;
  return {
    ...grid,
    points,
    cells: points * grid.questions.length,
    pointAt: (ordinal) => after.get(ordinal) ?? grid.pointAt(ordinal),
    *iterate(from = 0) {
      yield* grid.iterate(from);
      for (const point of refined) if (point.ordinal >= from) yield point;
    },
  };
}
