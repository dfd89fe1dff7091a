import { describe, expect, it } from 'vitest';
import { connectedIndices, restrictMatrix, restrictVector, support } from '../../../src/linalg/graph.js';
import { SparseBuilder } from '../../../src/linalg/sparse-builder.js';
import { basisState, blockadeChain, heisenbergRing, ring } from '../../support/matrices.js';

/** Two pieces: 0 – 3 – 5 (a chain with a phase) and 1 – 2; 4 alone. */
function pieces() {
  const builder = new SparseBuilder(6);
  builder.couple(0, 3, 1, 0.5);
  builder.couple(3, 5, 2);
  builder.couple(1, 2, 3);
  for (let k = 0; k < 6; k += 1) builder.add(k, k, 10 + k);
  return builder.build();
}

describe('connectedIndices', () => {
  it('finds the piece of a state, and the union for a superposition', () => {
    expect(connectedIndices(pieces(), [5])).toEqual(Int32Array.of(0, 3, 5));
    expect(connectedIndices(pieces(), [2])).toEqual(Int32Array.of(1, 2));
    expect(connectedIndices(pieces(), [4])).toEqual(Int32Array.of(4));
    expect(connectedIndices(pieces(), [2, 5, 2])).toEqual(Int32Array.of(0, 1, 2, 3, 5));
  });

  it('takes a stored zero for no edge', () => {
    const matrix = ring(4);
    expect(connectedIndices({ ...matrix, re: matrix.re.map(() => 0) }, [1])).toEqual(Int32Array.of(1));
  });

  it('counts known sectors: F(L + 2) states of an open blockade chain, C(10, 5) of a Heisenberg ring at zero magnetisation', () => {
    // OEIS A000045 (from memory); the spin count is common practice.
    expect(connectedIndices(blockadeChain(10, false), [0]).length).toBe(144);
    expect(connectedIndices(heisenbergRing(10), [0b0101010101]).length).toBe(252);
  });
});

describe('restriction', () => {
  it('keeps the elements among the indices', () => {
    const indices = Int32Array.of(0, 3, 5);
    const part = restrictMatrix(pieces(), indices);
    expect(part.dimension).toBe(3);
    expect([...part.rowStart]).toEqual([0, 2, 5, 7]);
    expect([...part.column]).toEqual([0, 1, 0, 1, 2, 1, 2]);
    expect([...part.re]).toEqual([10, 1, 1, 13, 2, 2, 15]);
    expect([...part.im!].map((x) => x + 0)).toEqual([0, 0.5, -0.5, 0, 0, 0, 0]);
    expect(restrictVector(basisState(6, 3), indices).re).toEqual(Float64Array.of(0, 1, 0));
  });

  it('loses the imaginary plane where none of it is left, and is free where everything is kept', () => {
    expect(restrictMatrix(pieces(), Int32Array.of(1, 2)).im).toBeNull();
    const matrix = pieces();
    expect(restrictMatrix(matrix, Int32Array.of(0, 1, 2, 3, 4, 5))).toBe(matrix);
  });

  it('support lists what is not zero in either plane', () => {
    expect(support({ re: Float64Array.of(0, 1, 0, 0), im: Float64Array.of(0, 0, 0, -2) })).toEqual(Int32Array.of(1, 3));
  });
});
