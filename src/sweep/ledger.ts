/**
 * Comparing results: value by value, bit by bit or within a tolerance, with a ledger of what differs and by how much.
 *
 * Two values are `identical` when they are the same double (or word, or list), `within` when they differ by no more than tolerance × the
 * larger of them, plus the rounding of the scale they were computed on; `beyond` otherwise. A number against none is beyond.
 */
import { canonicalJson, type Json } from '../core/json.js';
import type { PointFields } from '../spectral/types.js';
import type { CellFields } from '../statistics/types.js';
import { CELL_FIELDS, type FieldDeclaration, FLAG_FIELDS, POINT_FIELDS } from './fields.js';

/** Rounding that is forgiven, in units of the scale of a quantity: a few dozen operations on it. */
const ROUNDING = 64 * Number.EPSILON;

export type Verdict = 'identical' | 'within' | 'beyond';

/** Where a value stands. */
export interface ComparedPlace {
  readonly coordinates: { readonly [axis: string]: number | string };
  /** number of the question; null for what belongs to the point */
  readonly question: number | null;
}

export interface Difference extends ComparedPlace {
  readonly field: string;
  readonly a: Json;
  readonly b: Json;
  /** |a − b| / max(|a|, |b|); null where they are not both numbers */
  readonly relative: number | null;
  readonly verdict: 'within' | 'beyond';
}

export interface FieldComparison {
  readonly field: string;
  readonly compared: number;
  readonly identical: number;
  readonly within: number;
  readonly beyond: number;
  /** largest relative difference of two numbers */
  readonly largest: number;
}

export interface Comparison {
  readonly compared: number;
  readonly identical: number;
  readonly within: number;
  readonly beyond: number;
  readonly fields: readonly FieldComparison[];
  /** the gravest differences first, as many as are kept */
  readonly differences: readonly Difference[];
}

export interface Ledger {
  /** @param scale size of the numbers that the value was computed from */
  add(place: ComparedPlace, field: string, a: Json, b: Json, scale?: number): void;
  /** Element by element; of the elements that differ the gravest is kept. */
  addArray(place: ComparedPlace, field: string, a: Float64Array | null, b: Float64Array | null, scale?: number): void;
  result(): Comparison;
}

function judge(a: Json, b: Json, tolerance: number, scale: number): { readonly verdict: Verdict; readonly relative: number | null } {
  if (typeof a !== 'number' || typeof b !== 'number') {
    return typeof a !== 'number' && typeof b !== 'number' && canonicalJson(a) === canonicalJson(b)
      ? { verdict: 'identical', relative: 0 }
      : { verdict: 'beyond', relative: null };
  }
  if (Object.is(a, b)) return { verdict: 'identical', relative: 0 };
  const larger = Math.max(Math.abs(a), Math.abs(b));
  const difference = Math.abs(a - b);
  // A comparison with NaN is false, so NaN against a number is beyond.
  const verdict = larger < Infinity && difference <= tolerance * larger + ROUNDING * scale ? 'within' : 'beyond';
  return { verdict, relative: larger === 0 ? 0 : larger < Infinity ? difference / larger : null };
}

const gravity = ({ verdict, relative }: Difference): number => (verdict === 'beyond' ? 2 : 0) + (relative ?? 1);

/** @param keep differences that are kept in full */
export function comparisonLedger(tolerance: number, keep = 20): Ledger {
  const fields = new Map<string, { compared: number; identical: number; within: number; beyond: number; largest: number }>();
  let differences: Difference[] = [];

  const sorted = (): Difference[] => differences.sort((one, other) => gravity(other) - gravity(one)).slice(0, keep);
  const note = (difference: Difference): void => {
    differences.push(difference);
    if (differences.length >= 4 * keep) differences = sorted();
  };
  const count = (field: string, { verdict, relative }: { verdict: Verdict; relative: number | null }): void => {
    const entry = fields.get(field) ?? { compared: 0, identical: 0, within: 0, beyond: 0, largest: 0 };
    fields.set(field, entry);
    entry.compared++;
    entry[verdict]++;
    entry.largest = Math.max(entry.largest, relative ?? 0);
  };

  return {
    add(place, field, a, b, scale = 1) {
      const judged = judge(a, b, tolerance, scale);
      count(field, judged);
      if (judged.verdict !== 'identical') note({ ...place, field, a, b, relative: judged.relative, verdict: judged.verdict });
    },
    addArray(place, field, a, b, scale = 1) {
      if (a?.length !== b?.length) {
        count(field, { verdict: 'beyond', relative: null });
        note({ ...place, field, a: `${a?.length ?? 'no'} values`, b: `${b?.length ?? 'no'} values`, relative: null, verdict: 'beyond' });
        return;
      }
      let gravest: Difference | null = null;
      a?.forEach((value, index) => {
        const other = b![index];
        const judged = judge(value, other, tolerance, scale);
        count(field, judged);
        if (judged.verdict === 'identical') return;
        const difference = {
          ...place,
          field: `${field}[${index}]`,
          a: value,
          b: other,
          relative: judged.relative,
          verdict: judged.verdict,
        };
        if (gravest === null || gravity(difference) > gravity(gravest)) gravest = difference;
      });
      if (gravest !== null) note(gravest);
    },
    result() {
      const all = [...fields].map(([field, counts]) => ({ field, ...counts }));
      const sum = (key: 'compared' | Verdict): number => all.reduce((total, entry) => total + entry[key], 0);
      return {
        compared: sum('compared'),
        identical: sum('identical'),
        within: sum('within'),
        beyond: sum('beyond'),
        fields: all,
        differences: sorted(),
      };
    },
  };
}

/** A lower bound of ‖H‖ from the fields of a point: what its energies were computed on. */
function energyScale({ mean_energy, energy_variance }: PointFields): number {
  return Math.abs(mean_energy) + Math.sqrt(Math.max(0, energy_variance));
}

function compareFields(
  ledger: Ledger,
  place: ComparedPlace,
  declared: readonly FieldDeclaration[],
  a: object,
  b: object,
  scale: number,
): void {
  for (const { name, unit } of [...declared, ...FLAG_FIELDS]) {
    const prefix = place.question === null && (name === 'flags' || name === 'flag_reasons') ? 'point_' : '';
    const value = (of: object): Json => (of as { readonly [field: string]: Json })[name];
    ledger.add(place, prefix + name, value(a), value(b), unit === 'energy' ? scale : unit === 'energy²' ? scale * scale : 1);
  }
}

export function comparePointFields(ledger: Ledger, place: ComparedPlace, a: PointFields, b: PointFields): void {
  compareFields(ledger, place, POINT_FIELDS, a, b, Math.max(energyScale(a), energyScale(b)));
}

export function compareCellFields(ledger: Ledger, place: ComparedPlace, a: CellFields, b: CellFields): void {
  compareFields(ledger, place, CELL_FIELDS, a, b, 1);
}
