import { describe, expect, it } from 'vitest';
import { SparseBuilder } from '../../../src/linalg/sparse-builder.js';

describe('SparseBuilder', () => {
  it('sorts columns, sums what is given twice, and drops sums that vanish', () => {
    const builder = new SparseBuilder(3);
    builder.add(2, 2, 5);
    builder.add(0, 2, 1);
    builder.add(0, 1, 2);
    builder.add(0, 1, 0.5);
    builder.add(1, 0, 2.5);
    builder.add(1, 1, 4);
    builder.add(1, 1, -4);
    const matrix = builder.build();
    expect(matrix.rowStart).toEqual(Int32Array.of(0, 2, 3, 4));
    expect(matrix.column).toEqual(Int32Array.of(1, 2, 0, 2));
    expect(matrix.re).toEqual(Float64Array.of(2.5, 1, 2.5, 5));
    expect(matrix.im).toBeNull();
  });

  it('grows past its first capacity and keeps imaginary parts in place', () => {
    const n = 50;
    const builder = new SparseBuilder(n);
    for (let i = n - 1; i > 0; i -= 1) builder.couple(i, i - 1, i, i % 2 === 0 ? 0 : -i);
    const { rowStart, column, re, im } = builder.build();
    for (let i = 1; i < n; i += 1) {
      const below = rowStart[i];
      expect([column[below], re[below], im![below]]).toEqual([i - 1, i, i % 2 === 0 ? 0 : -i]);
      const above = rowStart[i] - 1;
      expect([column[above], re[above], im![above] + 0]).toEqual([i, i, i % 2 === 0 ? 0 : i]);
    }
  });

  it('has no imaginary plane where the imaginary parts cancel', () => {
    const builder = new SparseBuilder(2);
    builder.couple(0, 1, 1, 2);
    builder.couple(0, 1, 1, -2);
    expect(builder.build().im).toBeNull();
  });

  it('gives the empty matrix and can be built twice', () => {
    const builder = new SparseBuilder(2);
    expect(builder.build().rowStart).toEqual(Int32Array.of(0, 0, 0));
    builder.add(0, 0, 1);
    expect(builder.build()).toEqual(builder.build());
  });

  it('refuses elements outside, numbers that are not finite, and impossible dimensions', () => {
    const builder = new SparseBuilder(2);
    expect(() => builder.add(2, 0, 1)).toThrow(expect.objectContaining({ code: 'matrix.dimension' }));
    expect(() => builder.add(0, -1, 1)).toThrow(expect.objectContaining({ code: 'matrix.dimension' }));
    expect(() => builder.add(0, 0, NaN)).toThrow(expect.objectContaining({ code: 'matrix.not-finite' }));
    expect(() => builder.add(0, 1, 0, Infinity)).toThrow(expect.objectContaining({ code: 'matrix.not-finite' }));
    for (const dimension of [0, -1, 1.5, NaN]) {
      expect(() => new SparseBuilder(dimension)).toThrow(expect.objectContaining({ code: 'matrix.dimension' }));
    }
  });
});
