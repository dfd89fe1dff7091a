import { describe, expect, it } from 'vitest';
import { connectedIndices, restrictMatrix, restrictVector } from '../../src/linalg/graph.js';
import type { HermitianMatrix, StateVector } from '../../src/linalg/matrix.js';
import { normBound } from '../../src/linalg/norm.js';
import { spectralMeasure } from '../../src/spectral/measure.js';
import { referenceMeasure } from '../support/exact-spectrum.js';
import {
  basisState,
  blockadeChain,
  dimer,
  heisenbergRing,
  hypercube,
  randomDense,
  randomState,
  ring,
  sparseChain,
  systemFrom,
  tridiagonal,
} from '../support/matrices.js';

const measured = (matrix: HermitianMatrix, phi: StateVector, psi: StateVector = phi) => spectralMeasure(systemFrom(matrix, phi, psi));
const expectAll = (found: Float64Array, expected: readonly number[], tolerance: number): void => {
  expect(found.length).toBe(expected.length);
  expected.forEach((x, k) => expect(Math.abs(found[k] - x)).toBeLessThan(tolerance));
};

describe('against a full diagonalisation by ml-matrix', () => {
  // Both sides are stable: errors of a few n·ε‖H‖ in energies, more by the inverse distance of levels in weights. n ≤ 64, ‖H‖ ≤ 100.
  const expectReference = (matrix: HermitianMatrix, phi: StateVector, psi: StateVector): void => {
    const { measure, fields } = measured(matrix, phi, psi);
    const norm = normBound(matrix);
    const expected = referenceMeasure(matrix, phi, psi, 1e-11 * norm).filter((level) => level.weight > 1e-20);
    expect(measure.energies.length).toBe(expected.length);
    expected.forEach((level, k) => {
      expect(Math.abs(measure.energies[k] - level.energy)).toBeLessThan(1e-13 * norm);
      expect(Math.abs(measure.weights[k] - level.weight)).toBeLessThan(1e-12);
      expect(Math.abs(measure.overlapRe[k] - level.overlap[0])).toBeLessThan(1e-12);
      expect(Math.abs((measure.overlapIm?.[k] ?? 0) - level.overlap[1])).toBeLessThan(1e-12);
    });
    expect(fields.measure_residual).toBeLessThan(1e-14 * matrix.dimension);
  };

  it('random real and complex matrices and states', () => {
    for (const n of [2, 7, 30]) {
      expectReference(randomDense(n, false, n), randomState(n, false, 1), randomState(n, false, 2));
      expectReference(randomDense(n, true, n), randomState(n, true, 1), randomState(n, true, 2));
      expectReference(randomDense(n, false, n), randomState(n, true, 1), randomState(n, false, 2));
    }
  });

  it('degenerate levels: rings with and without flux, the hypercube', () => {
    for (const n of [3, 5, 8, 12]) expectReference(ring(n), basisState(n, 0), basisState(n, 1));
    expectReference(ring(3, 1, 0.5), basisState(3, 0), basisState(3, 1));
    expectReference(ring(9, 1.3, 0.7), randomState(9, true, 3), basisState(9, 4));
    expectReference(hypercube(5), basisState(32, 3), randomState(32, true, 4));
  });

  it('tridiagonal matrices from states inside and outside the ends', () => {
    expectReference(dimer(12, 0.4), basisState(13, 5), randomState(13, true, 5));
    expectReference(dimer(12, 0.4), randomState(13, true, 6), basisState(13, 0));
    expectReference(tridiagonal([1, 2, 3, 4, 5], [1, 0, 2, 1]), randomState(5, false, 7), randomState(5, false, 8));
  });

  it('a symmetric spin ring, where most levels are dark', () => {
    const indices = connectedIndices(heisenbergRing(8), [0b01010101]);
    const matrix = restrictMatrix(heisenbergRing(8), indices);
    const phi = restrictVector(basisState(256, 0b01010101), indices);
    expectReference(matrix, phi, restrictVector(basisState(256, 0b00110011), indices));
  });
});

describe('closed forms', () => {
  it('two-mode Bose–Hubbard levels of one, two and three bosons (elementary: 2 × 2 blocks by parity)', () => {
    const [J, U] = [1, 0.8];
    const end = (n: number, u = U) => measured(dimer(n, u, J), basisState(n + 1, 0)).measure.energies;
    expectAll(end(1), [-J, J], 1e-15);
    const two = Math.sqrt(U * U + 16 * J * J);
    expectAll(end(2), [(U - two) / 2, U, (U + two) / 2], 2e-15);
    const even = Math.sqrt(U * U + 2 * U * J + 4 * J * J);
    const odd = Math.sqrt(U * U - 2 * U * J + 4 * J * J);
    const three = [2 * U - J - even, 2 * U - J + even, 2 * U + J - odd, 2 * U + J + odd].sort((a, b) => a - b);
    expectAll(end(3), three, 4e-15);
    expectAll(end(3), [-1.89799919935936, 0.856440422583731, 3.09799919935936, 4.34355957741627], 1e-14);
  });

  it('doublet splittings of the dimer at strong coupling, 4J²/U and 3J³/U² to leading order', () => {
    // The quantum theory of local modes in a coupled system of nonlinear oscillators, Nonlinearity 3, 293 (1990), 10.1088/0951-7715/3/2/004,
    // from memory: 2N J^N/((N − 1)! U^(N − 1)). At J/U = 0.05 the next order makes 1 and 0.3 per cent.
    const splitting = (n: number): number => {
      const { energies } = measured(dimer(n, 20), basisState(n + 1, 0)).measure;
      return energies.at(-1)! - energies.at(-2)!;
    };
    expect(splitting(2) / (4 / 20)).toBeCloseTo(0.9901951359, 9);
    expect(splitting(3) / (3 / 400)).toBeCloseTo(0.9968696845, 9);
  });

  it('levels and weights of rings: E = −2g cos(2πk/L), w = 1/L or 2/L', () => {
    for (let sites = 3; sites <= 24; sites += 1) {
      const { measure, fields } = measured(ring(sites), basisState(sites, 0));
      const levels = Array.from({ length: Math.floor(sites / 2) + 1 }, (_, k) => k);
      expectAll(
        measure.energies,
        levels.map((k) => -2 * Math.cos((2 * Math.PI * k) / sites)),
        1e-14,
      );
      expectAll(
        measure.weights,
        levels.map((k) => (k === 0 || 2 * k === sites ? 1 : 2) / sites),
        1e-14,
      );
      // Quantum walks: the first detected passage time problem, Phys. Rev. E 95, 032141 (2017), 10.1103/PhysRevE.95.032141.
      expect(fields.accessible_dimension).toBe(sites % 2 === 0 ? sites / 2 + 1 : (sites + 1) / 2);
      expect(fields.energy_variance).toBeCloseTo(2, 13);
    }
    expect(measured(ring(6), basisState(6, 0)).fields.effective_dimension).toBeCloseTo(3.6, 13);
  });

  it('flux ring: no level is degenerate, and q has the phase of the displacement', () => {
    const [sites, phase] = [7, 0.5];
    const { measure } = measured(ring(sites, 1, phase), basisState(sites, 2), basisState(sites, 0));
    const levels = Array.from({ length: sites }, (_, k) => {
      const momentum = (2 * Math.PI * k) / sites;
      return { energy: -2 * Math.cos(momentum - phase), re: Math.cos(2 * momentum) / sites, im: Math.sin(2 * momentum) / sites };
    }).sort((a, b) => a.energy - b.energy);
    const list = (key: 'energy' | 're' | 'im'): number[] => levels.map((level) => level[key]);
    expectAll(measure.energies, list('energy'), 1e-14);
    expectAll(measure.overlapRe, list('re'), 1e-14);
    expectAll(measure.overlapIm!, list('im'), 1e-14);
  });

  it('hypercube: levels 2k − n with binomial weights; only n + 1 of 2^n states are reached', () => {
    // Hitting time for quantum walks on the hypercube, Phys. Rev. A 73, 032341 (2006), 10.1103/PhysRevA.73.032341 (n + 1 levels).
    for (const bits of [3, 6, 8]) {
      const { measure, fields } = measured(hypercube(bits), basisState(2 ** bits, 0));
      let choose = 1;
      const weights = Array.from({ length: bits + 1 }, (_, k) => {
        const w = choose / 2 ** bits;
        choose = (choose * (bits - k)) / (k + 1);
        return w;
      });
      expectAll(
        measure.energies,
        weights.map((_, k) => 2 * k - bits),
        1e-13,
      );
      expectAll(measure.weights, weights, 1e-14);
      expect(fields.accessible_dimension).toBe(bits + 1);
    }
  });

  it('analog search H = −|w><w| − |s><s|: two levels −(1 ± 1/√N)', () => {
    // Analog analogue of a digital quantum computation, Phys. Rev. A 57, 2403 (1998), 10.1103/PhysRevA.57.2403, from memory.
    const n = 64;
    const re = new Float64Array(n * n).fill(-1 / n);
    re[0] -= 1;
    const { measure } = measured({ kind: 'dense', dimension: n, re, im: null }, basisState(n, 0));
    expectAll(measure.energies, [-1.125, -0.875], 1e-14);
  });

  it('an end site of a long chain by Lanczos on a decoupled half', () => {
    // Two open chains of 40 and 400 sites: 2 cos(kπ/41), 2 sin²(kπ/41)/41.
    const chain = sparseChain(new Float64Array(440), 1);
    const cut = { ...chain, re: chain.re.slice() };
    for (const [row, column] of [
      [39, 40],
      [40, 39],
    ]) {
      for (let k = chain.rowStart[row]; k < chain.rowStart[row + 1]; k += 1) if (chain.column[k] === column) cut.re[k] = 0;
    }
    const { measure, fields } = measured(cut, basisState(440, 0));
    const angles = Array.from({ length: 40 }, (_, k) => ((40 - k) * Math.PI) / 41);
    expect(fields.method).toBe('lanczos-ql');
    expectAll(
      measure.energies,
      angles.map((a) => 2 * Math.cos(a)),
      1e-13,
    );
    expectAll(
      measure.weights,
      angles.map((a) => (2 / 41) * Math.sin(a) ** 2),
      1e-13,
    );
  });
});

describe('localised junction, exact values in 80-digit arithmetic', () => {
  // Twenty bosons at U/J = 1 from |20, 0>, by mpmath (80 digits): weights of the least levels are real at 1e-15.
  it('keeps faint weights to ten digits', () => {
    const { measure, fields } = measured(dimer(20, 1), basisState(21, 0));
    const faint = [
      [72.31157021445358, 1.7238907942956894e-15],
      [78.76959374431284, 5.575035958506819e-14],
      [84.88799677120687, 8.626643420197571e-13],
      [90.64499366835209, 8.460350014623224e-12],
      [96.00991009166928, 5.852854892896484e-11],
      [100.94746027253221, 3.018442252789929e-10],
    ];
    faint.forEach(([energy, weight], k) => {
      expect(Math.abs(measure.energies[k] - energy)).toBeLessThan(1e-12);
      expect(Math.abs(measure.weights[k] / weight - 1)).toBeLessThan(1e-10);
    });
    // The doublets at the top (3e-16 and 1.8e-12 apart, at a norm of 200) are one level each: merged weights, and a flag that says so.
    expect(fields).toMatchObject({ accessible_dimension: 21, accessible_by: 'structure', bright_levels: 19, flags: ['underresolved'] });
    expect(Math.abs(measure.weights.at(-1)! - 2 * 0.4730016967960364)).toBeLessThan(1e-14);
    expect(fields.smallest_gap! / 3.31008e-9).toBeCloseTo(1, 3);
  });

  it('keeps weights of 1e-25, and drops what is fainter', () => {
    const { measure } = measured(dimer(60, 0.5), basisState(61, 0));
    const at = (energy: number): number => measure.weights[measure.energies.findIndex((x) => Math.abs(x - energy) < 1e-9)];
    // Doublet members 2e-12 apart at a norm of 900 are merged: twice the weight.
    expect(Math.abs(at(567.6841600092661) / (2 * 5.06677064877375e-24) - 1)).toBeLessThan(1e-6);
    expect(Math.abs(at(583.7519824239449) / (2 * 2.11668160903333e-22) - 1)).toBeLessThan(1e-6);
    expect(Math.min(...measure.weights)).toBeGreaterThan(1e-26);
  });

  it('spreads over most levels near U N/(2J) = 2', () => {
    // Hilbert-space localization in closed quantum systems, Phys. Rev. A 93, 042101 (2016), 10.1103/PhysRevA.93.042101, for the effect;
    // values of 1/Σv² in 60-digit arithmetic, to three decimals. Further into the localised regime doublets merge, below.
    const spread = (n: number, ratio: number): number =>
      measured(dimer(n, (2 * ratio) / n), basisState(n + 1, 0)).fields.effective_dimension;
    const expected: [number, number, number][] = [
      [60, 1, 14.718],
      [60, 1.8, 20.041],
      [60, 2, 21.005],
      [200, 1, 26.892],
      [20, 1.8, 10.504],
      [20, 2, 10.079],
    ];
    for (const [n, ratio, value] of expected) expect(Math.abs(spread(n, ratio) - value)).toBeLessThan(6e-4);
  });

  it('says so where merged doublets change what is reported', () => {
    // Resolved, 1/Σv² is 6.753 (60-digit arithmetic); merging doublets can only lower it.
    const { fields } = measured(dimer(60, 0.1), basisState(61, 0));
    expect(fields.flags).toContain('underresolved');
    expect(fields.effective_dimension).toBeLessThan(6.753);
  });
});

describe('accessible dimensions where breakdown of the iteration miscounts', () => {
  it('blockade chains from the vacuum: 23 of 322 and 29 of 55', () => {
    // Weak ergodicity breaking from quantum many-body scars, Nat. Phys. 14, 745 (2018), 10.1038/s41567-018-0137-5, from memory, for the model;
    // counts and least weights by a second program.
    const periodic = measured(blockadeChain(12, true), basisState(322, 0));
    expect(periodic.fields.accessible_dimension).toBe(23);
    expect(Math.min(...periodic.measure.weights)).toBeCloseTo(2.4e-3, 4);
    expect(measured(blockadeChain(8, false), basisState(55, 0)).fields.accessible_dimension).toBe(29);
  });

  it('Heisenberg ring of ten spins from the Néel state: 22 of 252, ground level −4.515446354492', () => {
    // Linear magnetic chains with anisotropic coupling, Phys. Rev. 135, A640 (1964), 10.1103/PhysRev.135.A640, from memory, for the energy.
    const neel = 0b0101010101;
    const indices = connectedIndices(heisenbergRing(10), [neel]);
    const system = systemFrom(restrictMatrix(heisenbergRing(10), indices), restrictVector(basisState(1024, neel), indices));
    const { measure, fields } = spectralMeasure(system);
    expect(fields.accessible_dimension).toBe(22);
    expect(Math.abs(measure.energies[0] + 4.515446354492)).toBeLessThan(1e-12);
    expect(Math.min(...measure.weights)).toBeCloseTo(1e-3, 4);
  });
});

describe('random matrices', () => {
  it('spacings of a real symmetric and a complex Hermitian matrix', () => {
    // Distribution of the ratio of consecutive level spacings in random matrix ensembles, Phys. Rev. Lett. 110, 084101 (2013),
    // 10.1103/PhysRevLett.110.084101: 0.5307 and 0.5996. The ratio spreads by 0.26, so 200 levels give a standard error of 0.018; four of them.
    const ratio = (complex: boolean): number =>
      measured(randomDense(200, complex, 11), randomState(200, complex, 12)).fields.gap_ratio as number;
    expect(Math.abs(ratio(false) - 0.5307)).toBeLessThan(0.075);
    expect(Math.abs(ratio(true) - 0.5996)).toBeLessThan(0.075);
  });

  it('a random state: Σv² is 3/(d + 2) real and 2/(d + 1) complex on average', () => {
    // Quantum mechanical evolution towards thermal equilibrium, Phys. Rev. E 79, 061103 (2009), 10.1103/PhysRevE.79.061103, from memory.
    const d = 64;
    const draws = 60;
    const mean = (complex: boolean): number => {
      let total = 0;
      for (let k = 0; k < draws; k += 1)
        total += 1 / measured(randomDense(d, complex, 5), randomState(d, complex, 100 + k)).fields.effective_dimension;
      return total / draws;
    };
    // Relative spread of Σv² at d = 64 is about 0.16 (real), 0.09 (complex); over 60 draws five standard errors are 0.10 and 0.06.
    expect(Math.abs(mean(false) / (3 / (d + 2)) - 1)).toBeLessThan(0.1);
    expect(Math.abs(mean(true) / (2 / (d + 1)) - 1)).toBeLessThan(0.06);
  });
});
