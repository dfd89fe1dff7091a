/**
 * The dimension of the Krylov space of φ counted exactly, without a tolerance: the degree of the minimal polynomial of H on φ, modulo two
 * primes below 2^26, by the Berlekamp–Massey algorithm on the sequence χᵀH^kφ with a random χ.
 *
 * Square roots go in two ways. A diagonal similarity D⁻¹HD with D_i = √(a product of primes), found along a spanning tree of H's graph,
 * leaves bosonic and angular-momentum factors rational; roots that remain are mapped to square roots modulo a prime at which they exist.
 * The imaginary unit is a root of −1. All are ring homomorphisms, so the degree modulo p is never above the true one; it is below with
 * a probability of order D²/p, and the larger of two is taken.
 *
 * Shift-register synthesis and BCH decoding, IEEE Trans. Inf. Theory 15, 122 (1969), 10.1109/TIT.1969.1054260; Solving sparse linear
 * equations over finite fields, IEEE Trans. Inf. Theory 32, 54 (1986), 10.1109/TIT.1986.1057137 (both from memory).
 */
import { randomStream } from '../core/random.js';
import type { StateVector } from '../linalg/matrix.js';
import type { ModelFamily, System, SystemRequest } from '../models/types.js';
import { inverse, multiply, residue, splittingPrimes, squareRoot } from './modular-field.js';
import { exactHamiltonian, type ExactHamiltonian } from './modular-hamiltonian.js';
import { exactNumber, type ExactNumber, primesOf } from './modular-number.js';
import { minimalDegree } from './modular-sequence.js';

export interface ModularCount {
  /** the larger of `counts`; null where `obstacle` says why there is none */
  readonly dimension: number | null;
  readonly primes: readonly number[];
  readonly counts: readonly number[];
  /** matrix elements that no fraction explains and that stand for their doubles: random energies, phases */
  readonly literals: number;
  readonly obstacle: string | null;
}

/** More independent square roots than this leave no prime below 2^26. */
const MOST_ROOTS = 18;
const SEED = 1;
const PRIMES_USED = 2;

interface ExactState {
  readonly row: number;
  readonly re: ExactNumber;
  readonly im: ExactNumber;
}

/** Amplitudes of φ as exact multiples of the largest; null where one is no fraction or root of one. */
function exactState({ re, im }: StateVector): ExactState[] | null {
  let most = 0;
  const square = (row: number): number => re[row] ** 2 + (im === null ? 0 : im[row] ** 2);
  for (let row = 1; row < re.length; row += 1) if (square(row) > square(most)) most = row;
  const [x, y] = [re[most], im === null ? 0 : im[most]];
  const norm = x * x + y * y;
  const state: ExactState[] = [];
  for (let row = 0; row < re.length; row += 1) {
    const [a, b] = [re[row], im === null ? 0 : im[row]];
    if (a === 0 && b === 0) continue;
    const ratio = [(a * x + b * y) / norm, (b * x - a * y) / norm] as const;
    const [first, second] = ratio.map((part) => exactNumber(part, 4 * Number.EPSILON)) as [ExactNumber, ExactNumber];
    if (!first.recognised || !second.recognised) return null;
    state.push({ row, re: first, im: second });
  }
  return state;
}

/** D_i² of every row, as the primes of a radicand, along a spanning tree of the graph. */
function scaling({ pattern: { dimension, rowStart, column }, planes, numbers }: ExactHamiltonian, state: readonly ExactState[]): bigint[] {
  const scales = new Array<bigint | undefined>(dimension);
  const queue: number[] = [];
  const rootAt = (k: number): bigint | null => {
    for (const { re, im } of planes) {
      const place = re[k] !== 0 ? re[k] : im === null ? 0 : im[k];
      if (place !== 0) return numbers[place].radicand;
    }
    return null;
  };
  const spread = (first: number, scale: bigint): void => {
    if (scales[first] !== undefined) return;
    scales[first] = scale;
    queue.push(first);
    for (let row = queue.pop(); row !== undefined; row = queue.pop()) {
      for (let k = rowStart[row]; k < rowStart[row + 1]; k += 1) {
        if (scales[column[k]] !== undefined) continue;
        const root = rootAt(k);
        if (root === null) continue;
        scales[column[k]] = root ^ scales[row]!;
        queue.push(column[k]);
      }
    }
  };
  // Chosen so that the first amplitude of φ in each component becomes rational.
  for (const { row, re, im } of state) spread(row, re.numerator === 0n ? im.radicand : re.radicand);
  for (let row = 0; row < dimension; row += 1) spread(row, 0n);
  return scales as bigint[];
}

/** Residues of exact numbers at one prime, with the roots chosen once. */
class Residues {
  readonly p: number;
  private readonly roots = new Map<number, number>();
  private readonly products = new Map<bigint, number>();

  constructor(p: number) {
    this.p = p;
  }

  rational({ numerator, denominator }: ExactNumber): number {
    return multiply(residue(numerator, this.p), inverse(residue(denominator, this.p), this.p), this.p);
  }

  private root(square: number): number {
    let root = this.roots.get(square);
    if (root === undefined) this.roots.set(square, (root = squareRoot(square, this.p)));
    return root;
  }

  get imaginaryUnit(): number {
    return this.root(this.p - 1);
  }

  private product(radicand: bigint): number {
    let value = this.products.get(radicand);
    if (value === undefined) {
      value = primesOf(radicand).reduce((product, prime) => multiply(product, prime, this.p), 1);
      this.products.set(radicand, value);
    }
    return value;
  }

  /** √(a·b·c)/c of three products of primes: an element √a between rows scaled by c (its own) and b. */
  factor(a: bigint, b: bigint, c: bigint): number {
    const pairs = (a & b) | (a & c) | (b & c);
    const odd = a ^ b ^ c;
    const roots = primesOf(odd).reduce((product, prime) => multiply(product, this.root(prime), this.p), this.product(pairs));
    return c === 0n ? roots : multiply(roots, inverse(this.product(c), this.p), this.p);
  }
}

/** Roots that the similarity leaves, as the primes under them. */
function remainingRoots(
  { pattern: { dimension, rowStart, column }, planes, numbers }: ExactHamiltonian,
  scales: readonly bigint[],
  state: readonly ExactState[],
): number[] {
  let left = 0n;
  const seen = new Set<bigint>();
  const add = (odd: bigint): void => {
    if (seen.has(odd)) return;
    seen.add(odd);
    left |= odd;
  };
  for (const { re, im } of planes) {
    for (let row = 0; row < dimension; row += 1) {
      for (let k = rowStart[row]; k < rowStart[row + 1]; k += 1) {
        const between = scales[row] ^ scales[column[k]];
        if (re[k] !== 0) add(numbers[re[k]].radicand ^ between);
        if (im !== null && im[k] !== 0) add(numbers[im[k]].radicand ^ between);
      }
    }
  }
  for (const { row, re, im } of state) {
    if (re.numerator !== 0n) add(re.radicand ^ scales[row]);
    if (im.numerator !== 0n) add(im.radicand ^ scales[row]);
  }
  return primesOf(left);
}

interface Reduced {
  readonly elements: Float64Array;
  readonly phi: Float64Array;
}

/** D⁻¹HD and D⁻¹φ modulo p. */
function reduceAt(residues: Residues, hamiltonian: ExactHamiltonian, scales: readonly bigint[], state: readonly ExactState[]): Reduced {
  const { pattern, planes, numbers } = hamiltonian;
  const { p } = residues;
  const values = numbers.map((number) => residues.rational(number));
  const coefficients = planes.map(({ coefficient }) => residues.rational(coefficient));
  const complex = planes.some(({ im }) => im !== null) || state.some(({ im }) => im.numerator !== 0n);
  const unit = complex ? residues.imaginaryUnit : 0;
  const elements = new Float64Array(pattern.column.length);
  const rooted = numbers.some(({ radicand }) => radicand !== 0n) || scales.some((scale) => scale !== 0n);
  const part = (place: number, row: number, column: number): number =>
    place === 0 || !rooted
      ? values[place]
      : multiply(values[place], residues.factor(numbers[place].radicand, scales[column], scales[row]), p);
  for (let row = 0; row < pattern.dimension; row += 1) {
    for (let k = pattern.rowStart[row]; k < pattern.rowStart[row + 1]; k += 1) {
      let sum = 0;
      for (let a = 0; a < planes.length; a += 1) {
        const { re, im } = planes[a];
        let value = part(re[k], row, pattern.column[k]);
        if (im !== null) value += multiply(unit, part(im[k], row, pattern.column[k]), p);
        sum += multiply(coefficients[a], value % p, p);
      }
      elements[k] = sum % p;
    }
  }
  const phi = new Float64Array(pattern.dimension);
  for (const { row, re, im } of state) {
    const scaled = (number: ExactNumber): number =>
      number.numerator === 0n ? 0 : multiply(residues.rational(number), residues.factor(number.radicand, 0n, scales[row]), p);
    phi[row] = (scaled(re) + multiply(unit, scaled(im), p)) % p;
  }
  return { elements, phi };
}

/** χᵀH^kφ modulo p, k = 0, 1, … */
function* sequence({ elements, phi }: Reduced, { dimension, rowStart, column }: ExactHamiltonian['pattern'], p: number): Generator<number> {
  const stream = randomStream(SEED, 'modular', p);
  const chi = Float64Array.from({ length: dimension }, () => Math.floor(stream.uniform() * p));
  let vector = phi;
  let next: Float64Array = new Float64Array(dimension);
  for (;;) {
    let inner = 0;
    for (let row = 0; row < dimension; row += 1) inner = (inner + chi[row] * vector[row]) % p;
    yield inner;
    for (let row = 0; row < dimension; row += 1) {
      let sum = 0;
      for (let k = rowStart[row]; k < rowStart[row + 1]; k += 1) {
        sum += elements[k] * vector[column[k]];
        sum -= Math.floor(sum / p) * p;
      }
      next[row] = sum;
    }
    [vector, next] = [next, vector];
  }
}

/**
 * accessible_dimension of a system by exact counting.
 * @param system what the family built of the request: H in the sector of φ
 */
export function modularCount(family: ModelFamily, request: SystemRequest, system: System): ModularCount {
  const none = (obstacle: string, literals = 0): ModularCount => ({ dimension: null, primes: [], counts: [], literals, obstacle });
  const state = exactState(system.detected);
  if (state === null) return none('the detected state has amplitudes that are no fractions or square roots of fractions');
  const hamiltonian = exactHamiltonian(family, request, system);
  const scales = scaling(hamiltonian, state);
  const roots = remainingRoots(hamiltonian, scales, state);
  const { literals, pattern } = hamiltonian;
  const primes = roots.length > MOST_ROOTS ? [] : splittingPrimes(roots, PRIMES_USED);
  if (primes.length < PRIMES_USED) return none(`H holds square roots of ${roots.length} primes that no similarity removes`, literals);
  const counts = primes.map((p) =>
    minimalDegree(sequence(reduceAt(new Residues(p), hamiltonian, scales, state), pattern, p), pattern.dimension, p),
  );
  return { dimension: Math.max(...counts), primes, counts, literals, obstacle: null };
}
