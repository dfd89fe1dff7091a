/**
 * Samples: what the analysis keeps of a result row — where it lies, which question it answers, one number, and whether to trust it.
 *
 * A sample is small, so that the rows of a large sweep can be streamed through `collectSamples` without being held.
 */
import type { Question } from '../statistics/types.js';
import type { CellRow } from '../store/types.js';
import type { Quantity } from './quantities.js';

/** `undefined-value`: computed, but the quantity has no value there, such as a median past the budget. */
export type SampleState = 'value' | 'doubtful' | 'undefined-value' | 'failed' | 'missing';

/** How realisations become one value: the arithmetic mean, or the typical value exp<ln x>, which rare large values do not carry. */
export const AVERAGES = ['mean', 'typical'] as const;
export type Average = (typeof AVERAGES)[number];

export type Coordinates = { readonly [axis: string]: number | string };

export interface Sample {
  readonly questionOrdinal: number;
  readonly question: Question;
  /** Every axis of the sweep, size and coupling always. */
  readonly coordinates: Coordinates;
  readonly state: SampleState;
  /** Set where state is `value` or `doubtful`. */
  readonly value: number | null;
  /** How it is averaged with others of its kind; the mean when absent. */
  readonly average?: Average;
  /** The winding number differs at twice or half the resolution. */
  readonly sensitive: boolean;
  /** The resolution that was used; null where nothing was computed. */
  readonly resolution: { readonly energy: number; readonly weight: number } | null;
}

function sampler(quantity: Quantity): (row: CellRow) => Sample {
  // Rows read from a store each bring their own copy of the question; one copy is enough.
  const questions = new Map<number, Question>();
  return (row) => {
    const question = questions.get(row.questionOrdinal) ?? row.question;
    questions.set(row.questionOrdinal, question);
    const computed = row.fields !== null;
    const value = computed ? quantity.value(row) : null;
    const flags = [...(row.point?.flags ?? []), ...(row.fields?.flags ?? [])];
    const state: SampleState = !computed
      ? row.failure
        ? 'failed'
        : 'missing'
      : value === null
        ? 'undefined-value'
        : flags.includes('doubtful')
          ? 'doubtful'
          : 'value';
    return {
      questionOrdinal: row.questionOrdinal,
      question,
      coordinates: { size: row.spec.size, coupling: row.spec.coupling, ...row.coordinates },
      state,
      value,
      sensitive: flags.includes('resolution-sensitive'),
      resolution: row.fields ? { energy: row.fields.resolution_energy, weight: row.fields.resolution_weight } : null,
    };
  };
}

export function samplesOf(rows: Iterable<CellRow>, quantity: Quantity): Sample[] {
  return Array.from(rows, sampler(quantity));
}

export async function collectSamples(rows: AsyncIterable<CellRow>, quantity: Quantity): Promise<Sample[]> {
  const sample = sampler(quantity);
  const samples: Sample[] = [];
  for await (const row of rows) samples.push(sample(row));
  return samples;
}
