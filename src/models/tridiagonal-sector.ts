/** Tridiagonal Hamiltonians cut down to the runs that hold given basis states. A run ends where an off-diagonal element is exactly zero. */
import type { Sector } from './family-definition.js';

/**
 * Keeps the runs of coupled states that contain the given rows, in their order; the blocks stay uncoupled.
 * @param diagonal length n
 * @param offDiagonal length n − 1, element i couples rows i and i + 1
 * @param support rows that must be kept
 */
export function tridiagonalSector(diagonal: Float64Array, offDiagonal: Float64Array, support: readonly number[]): Sector {
  const wanted = new Set(support);
  const rowOf = new Int32Array(diagonal.length).fill(-1);
  const kept: number[] = [];
  for (let start = 0; start < diagonal.length;) {
    let end = start + 1;
    while (end < diagonal.length && offDiagonal[end - 1] !== 0) end += 1;
    let holds = false;
    for (let i = start; i < end && !holds; i += 1) holds = wanted.has(i);
    if (holds) for (let i = start; i < end; i += 1) rowOf[i] = kept.push(i) - 1;
    start = end;
  }
  const couples = (k: number): boolean => kept[k + 1] === kept[k] + 1;
  return {
    matrix: {
      kind: 'tridiagonal',
      dimension: kept.length,
      diagonal: Float64Array.from(kept, (i) => diagonal[i]),
      offDiagonal: Float64Array.from({ length: Math.max(0, kept.length - 1) }, (_, k) => (couples(k) ? offDiagonal[kept[k]] : 0)),
    },
    indexOf: ([row = -1]) => rowOf[row] ?? -1,
    labelOf: (row) => [kept[row]],
  };
}
