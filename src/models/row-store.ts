/** Rows of a sparse Hermitian matrix collected in the order states are found, then renumbered into compressed sparse rows. */
import type { SparseMatrix } from '../linalg/matrix.js';

/** Row starts are 32-bit. */
const MOST_ELEMENTS = 2 ** 31 - 1;

export class RowStore {
  private ends = new Int32Array(256);
  private rows = 0;
  private length = 0;
  private column = new Int32Array(1024);
  private re = new Float64Array(1024);
  /** null while every imaginary part is exactly zero */
  private im: Float64Array | null = null;

  /** Elements stored so far. */
  get elements(): number {
    return this.length;
  }

  /** Adds an element to the open row. @throws RangeError past 2^31 − 1 elements */
  push(column: number, re: number, im: number): void {
    const at = this.length;
    if (at === this.column.length) this.grow();
    this.column[at] = column;
    this.re[at] = re;
    if (im !== 0) {
      this.im ??= new Float64Array(this.re.length);
      this.im[at] = im;
    }
    this.length = at + 1;
  }

  /** Closes the open row. */
  endRow(): void {
    if (this.rows === this.ends.length) {
      const larger = new Int32Array(this.ends.length * 2);
      larger.set(this.ends);
      this.ends = larger;
    }
    this.ends[this.rows] = this.length;
    this.rows += 1;
  }

  /**
   * The matrix with rows and columns renumbered: new row k is the collected row order[k]. Columns are sorted and elements of the same
   * column summed.
   */
  matrix(order: Uint32Array): SparseMatrix {
    const dimension = this.rows;
    const rank = new Int32Array(dimension);
    for (let k = 0; k < dimension; k += 1) rank[order[k]] = k;
    const rowStart = new Int32Array(dimension + 1);
    const column = new Int32Array(this.length);
    const re = new Float64Array(this.length);
    const im = this.im === null ? null : new Float64Array(this.length);
    let end = 0;
    for (let k = 0; k < dimension; k += 1) {
      const old = order[k];
      const first = end;
      for (let at = old === 0 ? 0 : this.ends[old - 1]; at < this.ends[old]; at += 1) {
        const target = rank[this.column[at]];
        // Insertion into the sorted row: rows are short, and most arrive nearly sorted.
        let place = end;
        while (place > first && column[place - 1] > target) place -= 1;
        if (place > first && column[place - 1] === target) {
          re[place - 1] += this.re[at];
          if (im !== null && this.im !== null) im[place - 1] += this.im[at];
          continue;
        }
        for (let move = end; move > place; move -= 1) {
          column[move] = column[move - 1];
          re[move] = re[move - 1];
          if (im !== null) im[move] = im[move - 1];
        }
        column[place] = target;
        re[place] = this.re[at];
        if (im !== null && this.im !== null) im[place] = this.im[at];
        end += 1;
      }
      rowStart[k + 1] = end;
    }
    const cut = <T extends Int32Array | Float64Array>(plane: T): T => (end === plane.length ? plane : (plane.slice(0, end) as T));
    const complex = im?.subarray(0, end).some((value) => value !== 0) ?? false;
    return { kind: 'sparse', dimension, rowStart, column: cut(column), re: cut(re), im: complex && im !== null ? cut(im) : null };
  }

  private grow(): void {
    const capacity = Math.min(this.column.length * 2, MOST_ELEMENTS);
    if (capacity === this.column.length) throw new RangeError('more than 2^31 − 1 matrix elements');
    const column = new Int32Array(capacity);
    column.set(this.column);
    this.column = column;
    const widened = (plane: Float64Array): Float64Array<ArrayBuffer> => {
      const larger = new Float64Array(capacity);
      larger.set(plane);
      return larger;
    };
    this.re = widened(this.re);
    if (this.im !== null) this.im = widened(this.im);
  }
}
