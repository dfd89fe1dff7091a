/**
 * The space a sweep spans: its axes in their order, and the system at any place on them. Nothing is kept but the axes.
 */
import type { Json } from '../core/json.js';
import { findModel } from '../models/registry.js';
import { canonicalParameters } from '../models/parameters.js';
import type { Disorder, ModelFamily, StateSpec, SystemRequest } from '../models/types.js';
import type { SweepDocument } from './document.js';
import { declaredParameters } from './schema.js';

export interface SpaceAxis {
  readonly name: string;
  readonly values: readonly Json[];
  /** unit or meaning for axis titles */
  readonly unit: string;
  /** where its values stand in a sweep file */
  readonly key: readonly string[];
}

export interface SweepSpace {
  readonly family: ModelFamily;
  /** size and coupling, parameters, disorder strength and realisation, prepared and detected state: all, also those of one value */
  readonly axes: readonly SpaceAxis[];
  /** Product of the axis lengths; beyond 2^53 no longer exact, only large. */
  readonly points: number;
  /** @param place index on each axis @throws WindrowError model.parameter, model.coupling */
  requestAt(place: readonly number[]): SystemRequest;
}

/** Axis names that parameters of a family cannot take without their prefix. */
const TAKEN = new Set(['size', 'coupling', 'disorder', 'realisation', 'prepare', 'detect']);

export function sweepSpace(document: SweepDocument): SweepSpace {
  const family = findModel(document.model);
  const scale = family.scales.find((candidate) => candidate.name === document.coupling.as) ?? family.scales[0];
  const { disorder } = document;
  // The family's order, not the document's: a store may return keys in another order, and ordinals must not move.
  const names = [...declaredParameters(family.parameters).keys()].filter((name) => name in document.parameters);
  const realisations = Array.from({ length: disorder?.realisations ?? 1 }, (_, i) => i);
  const axes: readonly SpaceAxis[] = [
    { name: 'size', values: document.size.values, unit: family.size.meaning, key: ['size'] },
    { name: 'coupling', values: document.coupling.values, unit: scale.meaning, key: ['coupling'] },
    ...names.map((name) => ({
      name: TAKEN.has(name) ? `parameters.${name}` : name,
      values: document.parameters[name]?.values ?? [],
      unit: '',
      key: ['parameters', name],
    })),
    {
      name: 'disorder',
      values: disorder?.strength.values ?? [0],
      unit: 'full width W of the on-site energies',
      key: ['disorder', 'strength'],
    },
    { name: 'realisation', values: realisations, unit: '', key: ['disorder', 'realisations'] },
    { name: 'prepare', values: document.prepare.values, unit: '', key: ['prepare'] },
    { name: 'detect', values: document.detect.values, unit: '', key: ['detect'] },
  ];
  const after = 2 + names.length;
  return {
    family,
    axes,
    points: axes.reduce((product, axis) => product * axis.values.length, 1),
    requestAt(place) {
      const value = (axis: number): Json => axes[axis].values[place[axis]]!;
      const size = value(0) as number;
      const raw = Object.fromEntries(names.map((name, i) => [name, value(2 + i)]));
      const parameters = canonicalParameters(family, raw, size);
      return {
        size,
        coupling: scale.toCoupling(value(1) as number, size, parameters),
        parameters,
        disorder: disorderAt(value(after) as number, value(after + 1) as number, disorder?.seed),
        prepared: value(after + 2) as unknown as StateSpec,
        detected: value(after + 3) as unknown as StateSpec,
      };
    },
  };
}

/** No strength is no disorder, whatever the realisation: such points are the clean system and are computed once. */
function disorderAt(strength: number, realisation: number, seed: number | undefined): Disorder | null {
  return seed === undefined || strength === 0 ? null : { strength, seed, realisation };
}

/** Mixed-radix digits of an ordinal, the last axis fastest. */
export function placeOf(ordinal: number, axes: readonly SpaceAxis[]): number[] {
  const place = new Array<number>(axes.length);
  let rest = ordinal;
  for (let axis = axes.length - 1; axis >= 0; axis--) {
    const radix = axes[axis].values.length;
    place[axis] = rest % radix;
    rest = Math.floor(rest / radix);
  }
  return place;
}
