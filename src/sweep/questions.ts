/** The questions of a sweep: schedules × resolution × efficiency × budget, in the order of the file, the budget fastest. */
import type { Json } from '../core/json.js';
import { canonicalSchedule, scheduleFamilies } from '../schedules/registry.js';
import type { Question } from '../statistics/types.js';
import type { SweepDocument, ScheduleEntry } from './document.js';
import type { Axis } from './axis.js';
import { questionId } from './identity.js';
import { declaredParameters } from './schema.js';
import type { QuestionRecord } from './types.js';

/** A schedule of a sweep before it is canonical: plain values, and the entry of the file they come from. */
export interface RawSchedule {
  readonly entry: number;
  readonly values: { readonly family: string } & { readonly [parameter: string]: Json };
}

/** How many questions a sweep asks of every point. */
export function questionCount(document: SweepDocument): number {
  const { resolution, detector, budget } = document;
  const schedules = document.schedules.reduce((sum, entry) => sum + axesOf(entry).reduce((n, [, axis]) => n * axis.values.length, 1), 0);
  const others = [resolution.energy, resolution.weight, detector.efficiency, budget];
  return others.reduce((n, axis) => n * axis.values.length, schedules);
}

/** Every schedule of a sweep; within an entry the last parameter varies fastest. */
export function* rawSchedules(document: SweepDocument): IterableIterator<RawSchedule> {
  for (const [entry, schedule] of document.schedules.entries()) {
    for (const values of product(axesOf(schedule))) yield { entry, values: { ...values, family: schedule.family } };
  }
}

/** In the family's order, which no store or editor can change. */
function axesOf(entry: ScheduleEntry): readonly (readonly [string, Axis<Json>])[] {
  const family = scheduleFamilies.get(entry.family);
  const names = family === undefined ? Object.keys(entry) : [...declaredParameters(family.parameters).keys(), 'dead-time'];
  return names.flatMap((name) => {
    const axis = entry[name];
    return axis === undefined || typeof axis === 'string' ? [] : [[name, axis] as const];
  });
}

function* product(axes: readonly (readonly [string, Axis<Json>])[]): IterableIterator<Record<string, Json>> {
  const [first, ...rest] = axes;
  if (first === undefined) {
    yield {};
    return;
  }
  for (const value of first[1].values) {
    for (const others of product(rest)) yield { [first[0]]: value, ...others };
  }
}

/**
 * The questions of a document.
 * @throws WindrowError schedule.unknown, schedule.parameter
 */
export function expandQuestions(document: SweepDocument): readonly QuestionRecord[] {
  const records: QuestionRecord[] = [];
  const sampling = document.sampling ?? null;
  for (const { values } of rawSchedules(document)) {
    const schedule = canonicalSchedule(values);
    for (const energy of document.resolution.energy.values) {
      for (const weight of document.resolution.weight.values) {
        for (const efficiency of document.detector.efficiency.values) {
          for (const budget of document.budget.values) {
            const question: Question = { schedule, resolution: { energy, weight }, budget, detector: { efficiency }, sampling };
            records.push({ id: questionId(question), ordinal: records.length, question });
          }
        }
      }
    }
  }
  return records;
}
