/** Comparing the results of two sweeps, cell by cell. */
import { canonicalJson, type Json } from '../core/json.js';
import type { CellRow } from '../store/types.js';
import { compareCellFields, comparePointFields, type Comparison, comparisonLedger } from '../sweep/ledger.js';

export interface SweepComparison {
  readonly values: Comparison;
  /** cells of both, by their physics: model, size, coupling, parameters, states and question, whatever the method version */
  readonly common: number;
  readonly only_a: number;
  readonly only_b: number;
  /** common cells with numbers in one of the two only */
  readonly answered_only_a: number;
  readonly answered_only_b: number;
  /** common cells without numbers in either */
  readonly open: number;
}

/**
 * Compares the cells of two sweeps. Rows are matched as they stream, so sweeps in the same order need no memory; what has no partner yet
 * is held. A place that a sweep has more often than the other counts as its own.
 */
export async function compareRows(
  a: AsyncIterable<CellRow>,
  b: AsyncIterable<CellRow>,
  tolerance: number,
  keep?: number,
): Promise<SweepComparison> {
  const ledger = comparisonLedger(tolerance, keep);
  const counts = { common: 0, answered_only_a: 0, answered_only_b: 0, open: 0 };
  let lastPoint: string | null = null;
  const compare = (one: CellRow, other: CellRow): void => {
    counts.common++;
    const point = `${one.pointId} ${other.pointId}`;
    if (lastPoint !== point && one.point !== null && other.point !== null) {
      comparePointFields(ledger, { coordinates: one.coordinates, question: null }, one.point, other.point);
      lastPoint = point;
    }
    if (one.fields !== null && other.fields !== null) {
      compareCellFields(ledger, { coordinates: one.coordinates, question: one.questionOrdinal }, one.fields, other.fields);
    } else if (one.fields !== null) counts.answered_only_a++;
    else if (other.fields !== null) counts.answered_only_b++;
    else counts.open++;
  };

  const waiting = { a: new Map<string, CellRow[]>(), b: new Map<string, CellRow[]>() };
  const take = (row: CellRow, own: Map<string, CellRow[]>, others: Map<string, CellRow[]>, meet: (partner: CellRow) => void): void => {
    const key = canonicalJson([row.spec, row.question] as unknown as Json);
    const partners = others.get(key);
    const partner = partners?.shift();
    if (partner === undefined) own.set(key, [...(own.get(key) ?? []), row]);
    else {
      if (partners!.length === 0) others.delete(key);
      meet(partner);
    }
  };
  const rows = { a: a[Symbol.asyncIterator](), b: b[Symbol.asyncIterator]() };
  try {
    for (let open = { a: true, b: true }; open.a || open.b;) {
      const [nextA, nextB] = await Promise.all([open.a ? rows.a.next() : null, open.b ? rows.b.next() : null]);
      open = { a: nextA !== null && nextA.done !== true, b: nextB !== null && nextB.done !== true };
      if (open.a) take(nextA!.value as CellRow, waiting.a, waiting.b, (partner) => compare(nextA!.value as CellRow, partner));
      if (open.b) take(nextB!.value as CellRow, waiting.b, waiting.a, (partner) => compare(partner, nextB!.value as CellRow));
    }
  } finally {
    await Promise.all([rows.a.return?.(), rows.b.return?.()]);
  }
  const left = (side: Map<string, CellRow[]>): number => [...side.values()].reduce((sum, list) => sum + list.length, 0);
  return { values: ledger.result(), ...counts, only_a: left(waiting.a), only_b: left(waiting.b) };
}
