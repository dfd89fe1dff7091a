/** Matrices and states for kernel tests, written out here so that the tests do not lean on the model families. */
import { randomStream } from '../../src/core/random.js';
import type { DenseMatrix, HermitianMatrix, SparseMatrix, StateVector, TridiagonalMatrix } from '../../src/linalg/matrix.js';
import { SparseBuilder } from '../../src/linalg/sparse-builder.js';
import type { System } from '../../src/models/types.js';

export function basisState(dimension: number, index: number): StateVector {
  const re = new Float64Array(dimension);
  re[index] = 1;
  return { re, im: null };
}

export function randomState(dimension: number, complex: boolean, seed: number): StateVector {
  const stream = randomStream(seed, 'state');
  const plane = (): Float64Array => Float64Array.from({ length: dimension }, () => stream.normal());
  const state = { re: plane(), im: complex ? plane() : null };
  const norm = Math.hypot(...state.re, ...(state.im ?? []));
  return { re: state.re.map((x) => x / norm), im: state.im?.map((x) => x / norm) ?? null };
}

/** Normal elements of variance 1 off the diagonal. */
export function randomDense(dimension: number, complex: boolean, seed: number): DenseMatrix {
  const n = dimension;
  const stream = randomStream(seed, 'matrix');
  const re = new Float64Array(n * n);
  const im = complex ? new Float64Array(n * n) : null;
  for (let i = 0; i < n; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      re[i * n + j] = re[j * n + i] = stream.normal();
      if (im === null || j === i) continue;
      im[i * n + j] = stream.normal();
      im[j * n + i] = -im[i * n + j];
    }
  }
  return { kind: 'dense', dimension: n, re, im };
}

/** About four normal elements a row. */
export function randomSparse(dimension: number, seed: number): SparseMatrix {
  const stream = randomStream(seed, 'sparse');
  const builder = new SparseBuilder(dimension);
  for (let i = 0; i < dimension; i += 1) {
    builder.add(i, i, stream.normal());
    if (i > 0) builder.couple(i, i - 1, stream.normal());
    const far = Math.floor(stream.uniform() * i);
    if (far < i - 1) builder.couple(i, far, stream.normal());
  }
  return builder.build();
}

export function tridiagonal(diagonal: readonly number[], offDiagonal: readonly number[]): TridiagonalMatrix {
  return {
    kind: 'tridiagonal',
    dimension: diagonal.length,
    diagonal: Float64Array.from(diagonal),
    offDiagonal: Float64Array.from(offDiagonal),
  };
}

/** Two-mode Bose–Hubbard H = −J(a†b + b†a) + (U/2)[n_a(n_a − 1) + n_b(n_b − 1)], basis |N − k, k>. */
export function dimer(bosons: number, U: number, J = 1): TridiagonalMatrix {
  const k = Array.from({ length: bosons + 1 }, (_, index) => index);
  return tridiagonal(
    k.map((b) => (U / 2) * ((bosons - b) * (bosons - b - 1) + b * (b - 1))),
    k.slice(0, -1).map((b) => -J * Math.sqrt((bosons - b) * (b + 1))),
  );
}

/** H = −g Σ (e^{iθ}|x + 1><x| + h.c.) on a ring of `sites` ≥ 3, θ the phase of every bond. */
export function ring(sites: number, g = 1, phase = 0): SparseMatrix {
  const builder = new SparseBuilder(sites);
  for (let x = 0; x < sites; x += 1) builder.couple((x + 1) % sites, x, -g * Math.cos(phase), -g * Math.sin(phase));
  return builder.build();
}

/** H = −Σ X_i on `bits` spins. */
export function hypercube(bits: number): SparseMatrix {
  const builder = new SparseBuilder(2 ** bits);
  for (let s = 0; s < 2 ** bits; s += 1) for (let i = 0; i < bits; i += 1) builder.add(s, s ^ (1 << i), -1);
  return builder.build();
}

/** Spin flips Σ P X P on a chain where no two neighbours are up; element 0 is the vacuum. */
export function blockadeChain(sites: number, periodic: boolean): SparseMatrix {
  const bonds = periodic ? sites : sites - 1;
  const allowed = (s: number): boolean => !Array.from({ length: bonds }, (_, i) => (s >> i) & (s >> ((i + 1) % sites)) & 1).includes(1);
  const states = Array.from({ length: 2 ** sites }, (_, s) => s).filter(allowed);
  const place = new Map(states.map((s, at) => [s, at]));
  const builder = new SparseBuilder(states.length);
  for (const [s, at] of place) {
    for (let i = 0; i < sites; i += 1) {
      const other = place.get(s ^ (1 << i));
      if (other !== undefined) builder.add(at, other, 1);
    }
  }
  return builder.build();
}

/** Heisenberg ring Σ S·S in the full space of `sites` spins. */
export function heisenbergRing(sites: number): SparseMatrix {
  const builder = new SparseBuilder(2 ** sites);
  for (let s = 0; s < 2 ** sites; s += 1) {
    for (let i = 0; i < sites; i += 1) {
      const j = (i + 1) % sites;
      const equal = ((s >> i) & 1) === ((s >> j) & 1);
      builder.add(s, s, equal ? 0.25 : -0.25);
      if (!equal) builder.add(s, s ^ (1 << i) ^ (1 << j), 0.5);
    }
  }
  return builder.build();
}

/** A hopping chain as sparse storage, with on-site energies. */
export function sparseChain(onsite: ArrayLike<number>, hopping: number): SparseMatrix {
  const builder = new SparseBuilder(onsite.length);
  for (let x = 0; x < onsite.length; x += 1) {
    builder.add(x, x, onsite[x]);
    if (x + 1 < onsite.length) builder.couple(x, x + 1, hopping);
  }
  return builder.build();
}

export function systemFrom(matrix: HermitianMatrix, detected: StateVector, prepared: StateVector = detected): System {
  return { hilbertDimension: matrix.dimension, sectorDimension: matrix.dimension, matrix, detected, prepared };
}

/** The same matrix times a real number. */
export function times<M extends HermitianMatrix>(matrix: M, factor: number): M {
  const scaled = (plane: Float64Array | null): Float64Array | null => plane?.map((x) => x * factor) ?? null;
  return matrix.kind === 'tridiagonal'
    ? { ...matrix, diagonal: scaled(matrix.diagonal), offDiagonal: scaled(matrix.offDiagonal) }
    : { ...matrix, re: scaled(matrix.re), im: scaled(matrix.im) };
}
