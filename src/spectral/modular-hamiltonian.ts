/**
 * A Hamiltonian taken apart into exact numbers: H = A_0 + Σ c_a A_a + Σ c_a c_b A_ab, with the c_a the numbers of the request (coupling and
 * parameters, as the decimals they were written) and the A fractions and square roots of fractions.
 *
 * The A come from the family itself: H is linear in most of its numbers, so A_a is the change of H when c_a goes from one small power of
 * two to the next, which rounding does not touch. What is no such polynomial (a phase, a number of particles) stays as it is, in A_0.
 * The sum is held against H of the request, element by element. So 0.1 + 0.2 and 0.3 are the same number here, and a degeneracy that
 * rounding would lift is kept. Elements that no fraction explains, such as random energies, stand for their doubles.
 */
import { forEachElement } from '../linalg/elements.js';
import { normBound } from '../linalg/norm.js';
import type { HermitianMatrix, SparseMatrix } from '../linalg/matrix.js';
import type { ModelFamily, System, SystemRequest } from '../models/types.js';
import { exactDecimal, exactNumber, type ExactNumber } from './modular-number.js';

/** One A on the pattern of H: for every stored element the place of its parts in `numbers`; 0 is the number zero. */
export interface ExactPlane {
  readonly coefficient: ExactNumber;
  readonly re: Int32Array;
  /** null where every imaginary part is zero */
  readonly im: Int32Array | null;
}

export interface ExactHamiltonian {
  readonly pattern: Pick<SparseMatrix, 'dimension' | 'rowStart' | 'column'>;
  readonly planes: readonly ExactPlane[];
  /** distinct numbers of all planes; the first is zero */
  readonly numbers: readonly ExactNumber[];
  /** elements, counted once a plane, that stand for their doubles */
  readonly literals: number;
}

/** Relative to ‖H‖: what the sum of the planes may miss. */
const AGREEMENT = 1e-11;

type Path = readonly (string | number)[];

/** Stored elements as sparse rows; zeros that a tridiagonal or sparse matrix stores stay. */
function rowsOf(matrix: HermitianMatrix): SparseMatrix {
  if (matrix.kind === 'sparse') return matrix;
  const column: number[] = [];
  const re: number[] = [];
  const im: number[] = [];
  const rowStart = new Int32Array(matrix.dimension + 1);
  forEachElement(matrix, (row, to, x, y) => {
    column.push(to);
    re.push(x);
    im.push(y);
    rowStart[row + 1] = column.length;
  });
  const complex = matrix.kind === 'dense' && matrix.im !== null;
  return {
    kind: 'sparse',
    dimension: matrix.dimension,
    rowStart,
    column: Int32Array.from(column),
    re: Float64Array.from(re),
    im: complex ? Float64Array.from(im) : null,
  };
}

const sameList = (a: Int32Array, b: Int32Array): boolean => a.length === b.length && a.every((value, k) => value === b[k]);

/** Where the request holds numbers that are not zero: the coupling, parameters, entries of lists. */
function numberPaths(request: SystemRequest): Path[] {
  const inside = Object.entries(request.parameters as Record<string, unknown>).flatMap(([name, value]): Path[] =>
    Array.isArray(value) ? value.map((_, index): Path => ['parameters', name, index]) : [['parameters', name]],
  );
  return [['coupling'], ...inside].filter((path) => {
    const value = valueAt(request, path);
    return typeof value === 'number' && value !== 0;
  });
}

function valueAt(root: unknown, path: Path): unknown {
  return path.reduce<unknown>((value, key) => (value as Record<string | number, unknown>)[key], root);
}

function replaced(root: unknown, path: Path, value: number): unknown {
  const [key, ...rest] = path;
  if (key === undefined) return value;
  const inner = replaced((root as Record<string | number, unknown>)[key], rest, value);
  if (Array.isArray(root)) return (root as unknown[]).map((entry, index) => (index === key ? inner : entry));
  return { ...(root as object), [key]: inner };
}

class Trials {
  private readonly family: ModelFamily;
  private readonly request: SystemRequest;
  readonly own: SparseMatrix;

  constructor(family: ModelFamily, request: SystemRequest, own: HermitianMatrix) {
    this.family = family;
    this.request = request;
    this.own = rowsOf(own);
  }

  /** H with other numbers; null where the family refuses them or the pattern of elements is another. */
  at(paths: readonly Path[], values: readonly number[]): SparseMatrix | null {
    const request = paths.reduce<unknown>((changed, path, k) => replaced(changed, path, values[k]), this.request) as SystemRequest;
    if (!this.family.parameters.safeParse(request.parameters).success) return null;
    let matrix: SparseMatrix;
    try {
      matrix = rowsOf(this.family.build(request).matrix);
    } catch {
      return null; // numbers that the family doesn't take, such as a filling that isn't whole
    }
    return sameList(matrix.rowStart, this.own.rowStart) && sameList(matrix.column, this.own.column) ? matrix : null;
  }

  /** Numbers that may be anything, tried beside the given value: not a count of particles or of colours. */
  continuous(path: Path): boolean {
    if (path[0] === 'coupling') return true;
    const beside = replaced(this.request, path, (valueAt(this.request, path) as number) * 0.7310585786300049) as SystemRequest;
    return this.family.parameters.safeParse(beside.parameters).success;
  }
}

interface Parts {
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

/** x·a + y·b */
function combine(x: number, a: Parts, y: number, b: Parts): Parts {
  const plane = (p: Float64Array | null, q: Float64Array | null): Float64Array =>
    Float64Array.from(a.re, (_, k) => x * (p === null ? 0 : p[k]) + y * (q === null ? 0 : q[k]));
  return { re: plane(a.re, b.re), im: a.im === null && b.im === null ? null : plane(a.im, b.im) };
}

function farthest(parts: Parts): number {
  const largest = (plane: Float64Array | null): number => (plane === null ? 0 : plane.reduce((most, x) => Math.max(most, Math.abs(x)), 0));
  return Math.max(largest(parts.re), largest(parts.im));
}

interface Split {
  /** one a plane: the numbers of the request whose product multiplies it */
  readonly monomials: readonly (readonly number[])[];
  readonly parts: readonly Parts[];
  /** what rounding may have left in an element of a plane */
  readonly noise: number;
}

/** Powers of two that differ between neighbours, so that two numbers cancel in no element; another choice for a second attempt. */
const BASES = [
  [2, 4, 8, 16],
  [16, 2, 32, 8, 4],
] as const;

/** Products of two numbers are looked for among at most this many. */
const MOST_PAIRED = 16;

/** A sum of multiples of matrices. */
const total = (terms: readonly (readonly [number, Parts])[]): Parts =>
  terms.reduce<Parts>((sum, [factor, parts]) => combine(1, sum, factor, parts), combine(0, terms[0][1], 0, terms[0][1]));

/**
 * The planes of H as a polynomial of these numbers, linear in each and with products of at most two; null where it is no such polynomial.
 */
function split(trials: Trials, paths: readonly Path[], values: readonly number[], norm: number): Split | null {
  for (const bases of BASES) {
    const base = paths.map((_, k) => bases[k % bases.length]);
    const doubled = (...which: number[]): SparseMatrix | null =>
      trials.at(
        paths,
        base.map((value, k) => (which.includes(k) ? 2 * value : value)),
      );
    const start = doubled();
    const single = paths.map((_, k) => doubled(k));
    if (start === null || single.includes(null)) continue;
    const noise = 8 * Number.EPSILON * (1 + paths.length) * farthest(start);
    const slopes = single.map((changed, k) => combine(1 / base[k], changed!, -1 / base[k], start));

    /** @param mixed coefficient of the product of two numbers, by their places */
    const finish = (mixed: readonly (readonly [number, number, Parts])[]): Split | null => {
      const linear = slopes.map((slope, k) =>
        total([
          [1, slope],
          ...mixed.flatMap(([a, b, part]) => (a === k ? [[-base[b], part] as const] : b === k ? [[-base[a], part] as const] : [])),
        ]),
      );
      const constant = total([
        [1, start],
        ...linear.map((part, k) => [-base[k], part] as const),
        ...mixed.map(([a, b, part]) => [-base[a] * base[b], part] as const),
      ]);
      const monomials = [[], ...values.map((value) => [value]), ...mixed.map(([a, b]) => [values[a], values[b]])];
      const parts = [constant, ...linear, ...mixed.map(([, , part]) => part)];
      const again = total(parts.map((part, k) => [monomials[k].reduce((product, value) => product * value, 1), part] as const));
      return farthest(combine(1, again, -1, trials.own)) <= AGREEMENT * norm ? { monomials, parts, noise } : null;
    };

    const found = finish([]);
    if (found !== null || paths.length > MOST_PAIRED) return found;
    const mixed: [number, number, Parts][] = [];
    for (let a = 0; a < paths.length; a += 1) {
      for (let b = 0; b < a; b += 1) {
        const both = doubled(a, b);
        if (both === null) return null;
        const bend = total([
          [1, both],
          [-1, single[a]!],
          [-1, single[b]!],
          [1, start],
        ]);
        if (farthest(bend) > noise) mixed.push([a, b, combine(1 / (base[a] * base[b]), bend, 0, bend)]);
      }
    }
    return finish(mixed);
  }
  return null;
}

/** Numbers are added one by one where all together are no polynomial, so that a phase keeps none of the others out. */
function bestSplit(trials: Trials, request: SystemRequest, norm: number): Split {
  const own: Split = { monomials: [[]], parts: [trials.own], noise: 0 };
  const paths = numberPaths(request).filter((path) => trials.continuous(path));
  const attempt = (chosen: readonly Path[]): Split | null =>
    split(
      trials,
      chosen,
      chosen.map((path) => valueAt(request, path) as number),
      norm,
    );
  const whole = attempt(paths);
  if (whole !== null) return whole;
  let best = own;
  let kept: readonly Path[] = [];
  for (const path of paths) {
    const longer = attempt([...kept, path]);
    if (longer === null) continue;
    best = longer;
    kept = [...kept, path];
  }
  return best;
}

/** The product of some numbers as they were written. */
function exactProduct(values: readonly number[]): ExactNumber {
  return values.map(exactDecimal).reduce(
    (product, { numerator, denominator }) => ({
      ...product,
      numerator: product.numerator * numerator,
      denominator: product.denominator * denominator,
    }),
    exactDecimal(1),
  );
}

/** Gives every distinct double one exact number. */
class NumberTable {
  readonly numbers: ExactNumber[] = [exactDecimal(0)];
  literals = 0;
  private readonly known = new Map<number, number>([[0, 0]]);
  private readonly noise: number;

  constructor(noise: number) {
    this.noise = noise;
  }

  places(plane: Float64Array): Int32Array {
    return Int32Array.from(plane, (value) => {
      let place = this.known.get(value);
      if (place === undefined) {
        const number = exactNumber(value, this.noise);
        place = number.numerator === 0n ? 0 : this.numbers.push(number) - 1;
        this.known.set(value, place);
      }
      if (!this.numbers[place].recognised) this.literals += 1;
      return place;
    });
  }
}

/**
 * H of a system in exact numbers.
 * @param system what the family built of the request
 */
export function exactHamiltonian(family: ModelFamily, request: SystemRequest, { matrix }: Pick<System, 'matrix'>): ExactHamiltonian {
  const trials = new Trials(family, request, matrix);
  const { monomials, parts, noise } = bestSplit(trials, request, normBound(matrix));
  const table = new NumberTable(noise);
  const planes = parts.map(({ re, im }, k): ExactPlane => {
    const imaginary = im === null ? null : table.places(im);
    return {
      coefficient: exactProduct(monomials[k]),
      re: table.places(re),
      im: imaginary?.some((place) => place !== 0) === true ? imaginary : null,
    };
  });
  const { dimension, rowStart, column } = trials.own;
  return { pattern: { dimension, rowStart, column }, planes, numbers: table.numbers, literals: table.literals };
}
