/**
 * What only shows when the values of a sweep meet: a state that does not fit a size, a schedule whose bounds cross, a grid that is too
 * large. All of it is found here, before anything starts.
 */
import { WindrowError } from '../core/errors.js';
import { buildSchedule, canonicalSchedule } from '../schedules/registry.js';
import type { SweepDocument } from './document.js';
import { questionCount, rawSchedules } from './questions.js';
import { Refusal, type KeyPath } from './refusal.js';
import { sweepSpace, type SpaceAxis, type SweepSpace } from './space.js';
import { canonicalJson } from '../core/json.js';

/** Cells (points × questions) a sweep may have without being asked twice: some hours of one machine's work at a few milliseconds each. */
export const CELL_LIMIT = 2_000_000;

/** Questions one sweep may ask; they are kept in memory and travel with every job. */
export const QUESTION_LIMIT = 10_000;

/** Points whose requests are checked one by one; larger grids are checked along every axis with the other axes at their ends. */
const CHECK_LIMIT = 20_000;

/**
 * Holds a document against the families it names.
 * @param allowLarge accepts a grid above CELL_LIMIT
 * @throws Refusal with the code of the family's own error, or sweep.too-large, sweep.value
 */
export function checkDocument(document: SweepDocument, allowLarge: boolean): void {
  const space = sweepSpace(document);
  checkExtent(document, space, allowLarge);
  checkSchedules(document);
  for (const place of places(space.axes)) checkPlace(space, place);
}

function checkExtent(document: SweepDocument, space: SweepSpace, allowLarge: boolean): void {
  const questions = questionCount(document);
  if (questions > QUESTION_LIMIT) {
    throw new Refusal('sweep.too-large', ['schedules'], 'more questions than one sweep may ask', {
      found: `${questions} combinations of schedule, resolution, efficiency and budget`,
      allowed: `at most ${QUESTION_LIMIT}`,
    });
  }
  const cells = space.points * questions;
  if (cells <= CELL_LIMIT || (allowLarge && cells <= Number.MAX_SAFE_INTEGER)) return;
  const longest = space.axes.reduce((most, axis) => (axis.values.length > most.values.length ? axis : most));
  throw new Refusal('sweep.too-large', longest.key, 'a grid larger than is run without being asked twice', {
    found: `${space.points} points × ${questions} questions = ${cells} cells`,
    allowed: allowLarge ? `at most ${Number.MAX_SAFE_INTEGER} cells` : `at most ${CELL_LIMIT} cells, or more with --allow-large`,
  });
}

function checkSchedules(document: SweepDocument): void {
  const seen = new Map<string, number>();
  for (const { entry, values } of rawSchedules(document)) {
    const path: KeyPath = ['schedules', entry];
    try {
      const schedule = canonicalSchedule(values);
      buildSchedule(schedule);
      const text = canonicalJson(schedule);
      const before = seen.get(text);
      if (before !== undefined) {
        throw new Refusal('sweep.value', path, `the same schedule as schedules[${before}]`, {
          found: text,
          allowed: 'every schedule once',
        });
      }
      seen.set(text, entry);
    } catch (error) {
      throw located(error, (where) => [...path, ...where.filter((step) => typeof step === 'string' && step in values)]);
    }
  }
}

function checkPlace(space: SweepSpace, place: readonly number[]): void {
  try {
    space.family.canonical(space.requestAt(place));
  } catch (error) {
    throw located(error, (where) => axisPath(space, place, where), situation(space, place));
  }
}

/** A list of states has an index in its key path; a single one has not. */
function axisPath(space: SweepSpace, place: readonly number[], where: KeyPath): KeyPath {
  const axis = space.axes.findIndex((candidate) => candidate.key.length === 1 && candidate.key[0] === where[0]);
  const several = axis >= 2 && space.axes[axis].values.length > 1;
  return several ? [...where.slice(0, 1), place[axis], ...where.slice(1)] : where;
}

/** ' at size 8, U 0.5': the values of the axes that vary, so that a user sees which of the points it is. */
function situation(space: SweepSpace, place: readonly number[]): string {
  const varying = space.axes.flatMap((axis, index) => {
    const value = axis.values[place[index]];
    return axis.values.length > 1 && (typeof value === 'number' || typeof value === 'string') ? [`${axis.name} ${value}`] : [];
  });
  return varying.length === 0 ? '' : ` (at ${varying.join(', ')})`;
}

/** The families name keys by dots, `prepare.superposition.1`; anything that is not their error is passed on. */
function located(error: unknown, pathOf: (where: KeyPath) => KeyPath, suffix = ''): unknown {
  if (!(error instanceof WindrowError)) return error;
  const where = (error.details.where ?? '').split('.').map((step) => (/^\d+$/.test(step) ? Number(step) : step));
  const { found, allowed } = error.details;
  return new Refusal(error.code, pathOf(where), `${error.message}${suffix}`, {
    ...(found === undefined ? {} : { found }),
    ...(allowed === undefined ? {} : { allowed }),
    cause: error,
  });
}

/**
 * The places worth checking. Families look at the coupling only for being finite, and at disorder only for its strength: of those the
 * two ends do. All combinations of the rest, or, where they are too many, each axis with the others at their ends.
 */
export function* places(axes: readonly SpaceAxis[]): IterableIterator<number[]> {
  const ends = axes.map((axis) => (axis.values.length === 1 ? [0] : [0, axis.values.length - 1]));
  const all = axes.map((axis, i) => (ENDS_ONLY.has(axis.name) ? ends[i] : axis.values.map((_, index) => index)));
  if (count(all) <= CHECK_LIMIT) {
    yield* combinations(all);
    return;
  }
  // With many axes even the corners are many; then the others stay at their first value.
  const others = count(ends) <= CHECK_LIMIT / 100 ? ends : axes.map(() => [0]);
  for (const [axis, indices] of all.entries()) {
    yield* combinations(others.map((end, i) => (i === axis ? indices : end)));
  }
}

const ENDS_ONLY = new Set(['coupling', 'disorder', 'realisation']);

const count = (sets: readonly (readonly number[])[]): number => sets.reduce((n, set) => n * set.length, 1);

function* combinations(sets: readonly (readonly number[])[]): IterableIterator<number[]> {
  const [first, ...rest] = sets;
  if (first === undefined) {
    yield [];
    return;
  }
  for (const index of first) for (const others of combinations(rest)) yield [index, ...others];
}
