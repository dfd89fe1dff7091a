/**
 * The graph of a sparse matrix: basis states are vertices, nonzero off-diagonal elements are edges.
 *
 * A state never leaves the connected components that hold its support, so H and the states may be cut down to them before anything
 * costly is done.
 */
import type { SparseMatrix, StateVector } from './matrix.js';

/** Indices where a vector is not exactly zero, ascending. */
export function support(vector: StateVector): Int32Array {
  const indices: number[] = [];
  for (let k = 0; k < vector.re.length; k += 1) {
    if (vector.re[k] !== 0 || (vector.im !== null && vector.im[k] !== 0)) indices.push(k);
  }
  return Int32Array.from(indices);
}

/** All vertices connected with those given (breadth first), ascending. Its length is the sector dimension of a state with that support. */
export function connectedIndices(matrix: SparseMatrix, from: Iterable<number>): Int32Array {
  const { dimension: n, rowStart, column, re, im } = matrix;
  const seen = new Uint8Array(n);
  const queue = new Int32Array(n);
  let reached = 0;
  for (const vertex of from) {
    if (seen[vertex] === 1) continue;
    seen[vertex] = 1;
    queue[reached] = vertex;
    reached += 1;
  }
  for (let head = 0; head < reached; head += 1) {
    const vertex = queue[head];
    for (let k = rowStart[vertex]; k < rowStart[vertex + 1]; k += 1) {
      const next = column[k];
      // A stored zero is no edge.
      if (seen[next] === 1 || (re[k] === 0 && (im === null || im[k] === 0))) continue;
      seen[next] = 1;
      queue[reached] = next;
      reached += 1;
    }
  }
  return queue.slice(0, reached).sort();
}

/** Rows and columns of `indices` (ascending, no repeats); elements that lead out of them are dropped. */
export function restrictMatrix(matrix: SparseMatrix, indices: Int32Array): SparseMatrix {
  if (indices.length === matrix.dimension) return matrix;
  const place = new Int32Array(matrix.dimension).fill(-1);
  indices.forEach((old, now) => (place[old] = now));
  const rowStart = new Int32Array(indices.length + 1);
  let kept = 0;
  indices.forEach((old, now) => {
    for (let k = matrix.rowStart[old]; k < matrix.rowStart[old + 1]; k += 1) if (place[matrix.column[k]] >= 0) kept += 1;
    rowStart[now + 1] = kept;
  });
  const column = new Int32Array(kept);
  const re = new Float64Array(kept);
  const im = matrix.im === null ? null : new Float64Array(kept);
  let at = 0;
  for (const old of indices) {
    for (let k = matrix.rowStart[old]; k < matrix.rowStart[old + 1]; k += 1) {
      const now = place[matrix.column[k]];
      if (now < 0) continue;
      column[at] = now;
      re[at] = matrix.re[k];
      if (im !== null && matrix.im !== null) im[at] = matrix.im[k];
      at += 1;
    }
  }
  return { kind: 'sparse', dimension: indices.length, rowStart, column, re, im: im?.some((x) => x !== 0) ? im : null };
}

/** The elements at `indices`; the norm is not restored. */
export function restrictVector(vector: StateVector, indices: Int32Array): StateVector {
  const pick = (plane: Float64Array): Float64Array => Float64Array.from(indices, (index) => plane[index]);
  return { re: pick(vector.re), im: vector.im === null ? null : pick(vector.im) };
}
