/**
 * The sweep document: a sweep file with nothing left to compute. Every axis is a list of values, every default filled in.
 *
 * A document is plain JSON and itself a legal sweep file, so what the store keeps can be read back by the same function, and two
 * files that mean the same (a range here, a list there, keys in another order, YAML or JSON) give the same document.
 */
import type { z } from 'zod';
import type { Json } from '../core/json.js';
import { modelFamilies } from '../models/registry.js';
import type { ModelFamily, StateSpec } from '../models/types.js';
import { scheduleFamilies } from '../schedules/registry.js';
import { expandAxis, type Axis } from './axis.js';
import { refusals } from './issues.js';
import { Refusal, shown, suggestion, type KeyPath } from './refusal.js';
import * as schema from './schema.js';

/** One entry of `schedules`: the family and an axis for each of its parameters. */
export interface ScheduleEntry {
  readonly family: string;
  readonly [parameter: string]: string | Axis<Json>;
}

export interface SweepDocument {
  readonly name: string;
  readonly model: string;
  readonly size: Axis<number>;
  /** values in the scale `as` */
  readonly coupling: Axis<number> & { readonly as: string };
  readonly parameters: { readonly [name: string]: Axis<Json> };
  readonly prepare: Axis<StateSpec>;
  readonly detect: Axis<StateSpec>;
  readonly disorder?: { readonly strength: Axis<number>; readonly realisations: number; readonly seed: number };
  readonly schedules: readonly ScheduleEntry[];
  readonly resolution: { readonly energy: Axis<'auto' | number>; readonly weight: Axis<'auto' | number> };
  readonly budget: Axis<number>;
  readonly detector: { readonly efficiency: Axis<number> };
  /** accessible dimensions are counted exactly */
  readonly certify?: true;
  readonly sampling?: { readonly draws: number; readonly seed: number };
}

type Raw = Readonly<Record<string, unknown>>;

/**
 * The document a parsed sweep file stands for. Checks the form, the names and each value by itself; what only shows when values meet
 * (a state at a size, a schedule's bounds) is check.ts.
 * @param earliest picks the refusal to report when there are several; the first by default
 * @throws Refusal
 */
export function normalise(raw: unknown, earliest: (all: readonly Refusal[]) => Refusal = (all) => all[0]): SweepDocument {
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw)) {
    const found = raw === null || raw === undefined ? 'nothing' : Array.isArray(raw) ? 'a list' : shown(raw);
    throw new Refusal('sweep.value', [], 'a sweep file is a mapping of keys to values', { found, allowed: 'a mapping' });
  }
  const family = modelOf(raw as Raw);
  if ('disorder' in raw && !family.disordered) {
    const disordered = [...modelFamilies.values()].filter((other) => other.disordered).map((other) => other.name);
    throw new Refusal('model.parameter', ['disorder'], `${family.name} has no disorder`, {
      found: shown(raw.disorder),
      allowed: `no disorder; the families that have it are ${disordered.join(', ')}`,
    });
  }
  const result = schema.documentSchema(family).safeParse(raw);
  if (!result.success) throw earliest(refusals(result.error, raw));
  const file = result.data as Raw;
  const detector = (file['detector'] ?? {}) as Raw;
  const resolution = (file['resolution'] ?? {}) as Raw;
  const size = axis<number>(file['size'] ?? family.size.minimum, ['size'], schema.sizeValue);
  return {
    name: file['name'] as string,
    model: family.name,
    size,
    coupling: {
      ...axis<number>(file['coupling'], ['coupling'], schema.couplingValue),
      as: (file['coupling'] as { as?: string }).as ?? family.scales[0].name,
    },
    parameters: parameterAxes(schema.declaredParameters(family.parameters), (file['parameters'] ?? {}) as Raw, ['parameters']),
    prepare: states(file['prepare'], ['prepare']),
    detect: states(file['detect'] ?? 'same', ['detect']),
    ...disorderOf(file['disorder'] as Raw | undefined),
    schedules: (file['schedules'] as Raw[]).map(schedule),
    resolution: {
      energy: axis(resolution['energy'] ?? 'auto', ['resolution', 'energy'], schema.energyValue),
      weight: axis(resolution['weight'] ?? 'auto', ['resolution', 'weight'], schema.weightValue),
    },
    budget: axis(file['budget'], ['budget'], schema.budgetValue),
    detector: { efficiency: axis(detector['efficiency'] ?? 1, ['detector', 'efficiency'], schema.efficiencyValue) },
    ...samplingOf(file['sampling'] as Raw | undefined),
    ...(file['certify'] === true ? { certify: true } : {}),
  };
}

function modelOf(raw: Raw): ModelFamily {
  const name = raw['model'];
  const allowed = [...modelFamilies.keys()];
  if (name === undefined) {
    throw new Refusal('sweep.key', ['model'], 'a key that is missing', { found: 'nothing', allowed: allowed.join(', ') });
  }
  const family = typeof name === 'string' ? modelFamilies.get(name) : undefined;
  if (family !== undefined) return family;
  const hint = typeof name === 'string' ? suggestion(name, allowed) : '';
  throw new Refusal('model.unknown', ['model'], `not a model family${hint}`, { found: shown(name), allowed: allowed.join(', ') });
}

/** Axis of values that may come from a range: those are held against the schema of one value, too. */
function axis<T extends Json>(raw: unknown, path: KeyPath, value: z.ZodType, listValued = false): Axis<T> {
  return {
    values: expandAxis<T>(raw, path, listValued, (one, where) => {
      const result = value.safeParse(one);
      if (!result.success) throw rangeRefusal(refusals(result.error, one)[0], where, one);
    }),
  };
}

function rangeRefusal(inner: Refusal, path: KeyPath, value: unknown): Refusal {
  return new Refusal('sweep.value', path, 'a range that passes through a value that is not allowed', {
    found: shown(value),
    allowed: inner.details.allowed ?? 'another value',
  });
}

function parameterAxes(
  declared: ReadonlyMap<string, schema.ParameterDeclaration>,
  given: Raw,
  path: KeyPath,
): { readonly [name: string]: Axis<Json> } {
  const axes: Record<string, Axis<Json>> = {};
  for (const [name, parameter] of declared) {
    const raw = given[name] ?? parameter.defaultValue;
    if (raw !== undefined) axes[name] = axis<Json>(raw, [...path, name], parameter.value, parameter.kind.listValued);
  }
  return axes;
}

function schedule(entry: Raw, index: number): ScheduleEntry {
  const path: KeyPath = ['schedules', index];
  const family = scheduleFamilies.get(entry['family'] as string)!;
  const declared = schema.declaredParameters(family.parameters);
  if (declared.has('intervals') && entry['intervals'] === undefined) {
    throw new Refusal('sweep.key', [...path, 'intervals'], 'a key that is missing', {
      found: 'nothing',
      allowed: 'intervals: a list of measured intervals, or file: where they stand',
    });
  }
  return {
    ...parameterAxes(declared, entry, path),
    'dead-time': axis<number>(entry['dead-time'] ?? 0, [...path, 'dead-time'], schema.deadTimeValue),
    family: family.name,
  };
}

const states = (raw: unknown, path: KeyPath): Axis<StateSpec> => ({
  values: expandAxis<Json>(raw, path, false) as readonly unknown[] as readonly StateSpec[],
});

function disorderOf(raw: Raw | undefined): Pick<SweepDocument, 'disorder'> {
  if (raw === undefined) return {};
  return {
    disorder: {
      strength: axis(raw['strength'], ['disorder', 'strength'], schema.strengthValue),
      realisations: (raw['realisations'] as number | undefined) ?? 1,
      seed: (raw['seed'] as number | undefined) ?? 0,
    },
  };
}

function samplingOf(raw: Raw | undefined): Pick<SweepDocument, 'sampling'> {
  if (raw === undefined) return {};
  return { sampling: { draws: raw['draws'] as number, seed: (raw['seed'] as number | undefined) ?? 0 } };
}
