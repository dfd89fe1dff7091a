/**
 * The grid of a sweep: its points addressed by ordinal, made when asked for. A grid of 10^8 points costs no more than its axes.
 *
 * Two ordinals may be the same point (a clean system in every realisation of no disorder); they then have the same id, and the
 * point is computed once.
 */
import { canonicalJson, type Json } from '../core/json.js';
import { WindrowError } from '../core/errors.js';
import type { SystemRequest } from '../models/types.js';
import type { SweepDocument } from './document.js';
import { pointId } from './identity.js';
import { expandQuestions } from './questions.js';
import { placeOf, sweepSpace, type SpaceAxis } from './space.js';
import type { Grid, GridPoint, PointSpec } from './types.js';

/** A value as it stands on an axis: numbers and names as they are, anything else as canonical JSON. */
function coordinate(value: Json): number | string {
  return typeof value === 'number' || typeof value === 'string' ? value : canonicalJson(value);
}

/** Size and coupling are axes of every grid, also with a single value; any other quantity is one when it varies. */
const isAxis = (axis: SpaceAxis, index: number): boolean => index < 2 || axis.values.length > 1;

/** What is identified and stored of a canonical request. */
function specOf({ model, certify }: SweepDocument, request: SystemRequest): PointSpec {
  const { size, coupling, disorder, prepared, detected } = request;
  return {
    model,
    size,
    coupling,
    parameters: request.parameters as PointSpec['parameters'],
    disorder,
    prepared,
    detected,
    ...(certify === true ? { certify } : {}),
  };
}

/**
 * The grid of a document.
 * @throws WindrowError for a document whose schedules or model are not those of this program
 */
export function expandGrid(document: SweepDocument): Grid {
  const space = sweepSpace(document);
  const questions = expandQuestions(document);
  const shownAxes = space.axes.map((axis, index) => ({ axis, index })).filter(({ axis, index }) => isAxis(axis, index));

  function pointAt(ordinal: number): GridPoint {
    if (!Number.isInteger(ordinal) || ordinal < 0 || ordinal >= space.points) {
      throw new WindrowError('internal.invariant', 'an ordinal outside the grid', {
        found: String(ordinal),
        allowed: `0 to ${space.points - 1}`,
      });
    }
    const place = placeOf(ordinal, space.axes);
    const spec = specOf(document, space.family.canonical(space.requestAt(place)));
    const coordinates = Object.fromEntries(shownAxes.map(({ axis, index }) => [axis.name, coordinate(axis.values[place[index]])]));
    return { id: pointId(spec), ordinal, spec, coordinates };
  }

  function* iterate(from = 0): IterableIterator<GridPoint> {
    for (let ordinal = from; ordinal < space.points; ordinal++) yield pointAt(ordinal);
  }

  return {
    name: document.name,
    model: document.model,
    axes: shownAxes.map(({ axis }) => ({ name: axis.name, values: axis.values.map(coordinate), unit: axis.unit })),
    points: space.points,
    questions,
    cells: space.points * questions.length,
    pointAt,
    iterate,
  };
}
