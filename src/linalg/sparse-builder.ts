/**
 * Builds compressed sparse rows from elements given in any order.
 *
 * Guarantees: columns ascend within a row, elements given more than once are summed in the order given (so the same calls give the same
 * bits), sums that are exactly zero are left out (they are no edge of the graph), and `im` is null where every imaginary part is
 * exactly zero. `couple` keeps the matrix exactly Hermitian; `add` leaves that to the caller.
 */
import { WindrowError } from '../core/errors.js';
import type { SparseMatrix } from './matrix.js';

const FIRST_CAPACITY = 64;

export class SparseBuilder {
  readonly dimension: number;
  #count = 0;
  #row = new Int32Array(FIRST_CAPACITY);
  #column = new Int32Array(FIRST_CAPACITY);
  #re = new Float64Array(FIRST_CAPACITY);
  /** Allocated with the first imaginary part. */
  #im: Float64Array | null = null;

  /** @throws WindrowError matrix.dimension unless `dimension` is a positive integer below 2^31 */
  constructor(dimension: number) {
    if (!Number.isInteger(dimension) || dimension < 1 || dimension > 0x7fffffff) {
      throw new WindrowError('matrix.dimension', 'a matrix needs a positive whole dimension', {
        found: String(dimension),
        allowed: '1 to 2147483647',
      });
    }
    this.dimension = dimension;
  }

  /** Adds `re + i·im` to one element. @throws WindrowError matrix.dimension, matrix.not-finite */
  add(row: number, column: number, re: number, im = 0): void {
    if (!(row >= 0 && row < this.dimension && column >= 0 && column < this.dimension)) {
      throw new WindrowError('matrix.dimension', 'an element outside the matrix', {
        where: `element (${row}, ${column})`,
        allowed: `indices 0 to ${this.dimension - 1}`,
      });
    }
    if (!Number.isFinite(re) || !Number.isFinite(im)) {
      throw new WindrowError('matrix.not-finite', 'a matrix element is not a finite number', {
        where: `element (${row}, ${column})`,
        found: im === 0 ? String(re) : `${re} + ${im}i`,
      });
    }
    if (this.#count === this.#row.length) this.#grow();
    this.#row[this.#count] = row;
    this.#column[this.#count] = column;
    this.#re[this.#count] = re;
    if (im !== 0) {
      this.#im ??= new Float64Array(this.#row.length);
      this.#im[this.#count] = im;
    }
    this.#count += 1;
  }

  /** Adds `re + i·im` at (row, column) and its conjugate at (column, row). Not for the diagonal. */
  couple(row: number, column: number, re: number, im = 0): void {
    this.add(row, column, re, im);
    this.add(column, row, re, -im);
  }

  build(): SparseMatrix {
    const n = this.dimension;
    const order = this.#sorted();
    const rowStart = new Int32Array(n + 1);
    const column = new Int32Array(order.length);
    const re = new Float64Array(order.length);
    const im = this.#im === null ? null : new Float64Array(order.length);
    let kept = 0;
    let anyImaginary = false;
    for (let from = 0; from < order.length;) {
      const first = order[from];
      let sumRe = 0;
      let sumIm = 0;
      for (; from < order.length; from += 1) {
        const at = order[from];
        if (this.#row[at] !== this.#row[first] || this.#column[at] !== this.#column[first]) break;
        sumRe += this.#re[at];
        if (this.#im !== null) sumIm += this.#im[at];
      }
      if (sumRe === 0 && sumIm === 0) continue;
      column[kept] = this.#column[first];
      re[kept] = sumRe;
      if (im !== null) im[kept] = sumIm;
      anyImaginary ||= sumIm !== 0;
      rowStart[this.#row[first] + 1] += 1;
      kept += 1;
    }
    for (let i = 0; i < n; i += 1) rowStart[i + 1] += rowStart[i];
    return {
      kind: 'sparse',
      dimension: n,
      rowStart,
      column: column.slice(0, kept),
      re: re.slice(0, kept),
      im: im !== null && anyImaginary ? im.slice(0, kept) : null,
    };
  }

  /** Positions of the given elements by (row, column, order given): two stable counting sorts, O(elements + n). */
  #sorted(): Int32Array {
    const byColumn = countingSort(this.#column, this.#count, this.dimension, null);
    return countingSort(this.#row, this.#count, this.dimension, byColumn);
  }

  #grow(): void {
    const capacity = this.#row.length * 2;
    this.#row = enlarged(new Int32Array(capacity), this.#row);
    this.#column = enlarged(new Int32Array(capacity), this.#column);
    this.#re = enlarged(new Float64Array(capacity), this.#re);
    if (this.#im !== null) this.#im = enlarged(new Float64Array(capacity), this.#im);
  }
}

function enlarged<A extends Int32Array | Float64Array>(target: A, source: A): A {
  target.set(source);
  return target;
}

function countingSort(key: Int32Array, count: number, range: number, order: Int32Array | null): Int32Array {
  const next = new Int32Array(range + 1);
  for (let k = 0; k < count; k += 1) next[key[k] + 1] += 1;
  for (let i = 0; i < range; i += 1) next[i + 1] += next[i];
  const sorted = new Int32Array(count);
  for (let k = 0; k < count; k += 1) {
    const at = order === null ? k : order[k];
    sorted[next[key[at]]] = at;
    next[key[at]] += 1;
  }
  return sorted;
}
