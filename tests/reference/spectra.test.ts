/** Levels and ground energies against independent methods coded here: free fermions, the Bethe ansatz, closed forms, published numbers. */
import { describe, expect, it } from 'vitest';
import { groundState } from '../../src/linalg/ground-state.js';
import { levelsOf } from '../support/exact-spectrum.js';
import { systemOf } from '../support/model-requests.js';
import type { Asked } from '../support/model-requests.js';

/** ml-matrix and the ground-state iteration on norms of about ten: some thousand ulp. */
const ROUNDING = 1e-11;

const energyOf = (model: string, asked: Asked): number => groundState(systemOf(model, asked).matrix).energy;
const sorted = (values: readonly number[]): number[] => [...values].sort((a, b) => a - b);
const near = (found: number, expected: number, tolerance = ROUNDING): void => expect(Math.abs(found - expected)).toBeLessThan(tolerance);

function expectLevels(found: readonly number[], expected: readonly number[]): void {
  expect(found).toHaveLength(expected.length);
  sorted(expected).forEach((level, i) => near(found[i], level));
}

/** All sums of `count` of the given values. */
function sumsOf(values: readonly number[], count: number): number[] {
  if (count === 0) return [0];
  return values.flatMap((value, i) => sumsOf(values.slice(i + 1), count - 1).map((rest) => value + rest));
}

/**
 * Ground energy of the antiferromagnetic Heisenberg ring by the Bethe equations: L·2 arctan(2λ_j) = 2π I_j + Σ_k 2 arctan(λ_j − λ_k),
 * I_j = −(M − 1)/2 … (M − 1)/2, M = L/2, E = L/4 − Σ 2/(1 + 4λ_j²). Zur Theorie der Metalle, Z. Phys. 71, 205 (1931),
 * DOI 10.1007/BF01341708 (from memory).
 */
function betheEnergy(sites: number): number {
  const count = sites / 2;
  let rapidities = new Array<number>(count).fill(0);
  for (let round = 0; round < 400; round += 1) {
    rapidities = rapidities.map((own, j) => {
      const scattering = rapidities.reduce((total, other) => total + 2 * Math.atan(own - other), 0);
      const phase = (2 * Math.PI * (j - (count - 1) / 2) + scattering) / sites;
      return (own + Math.tan(phase / 2) / 2) / 2;
    });
  }
  return sites / 4 - rapidities.reduce((total, own) => total + 2 / (1 + 4 * own * own), 0);
}

describe('Heisenberg and XXZ chains', () => {
  // Finite rings: Linear magnetic chains with anisotropic coupling, Phys. Rev. 135, A640 (1964), DOI 10.1103/PhysRev.135.A640 (from memory)
  it.each([
    [4, -2],
    [6, -2.802775637732],
    [8, -3.6510934089372],
    [10, -4.515446354492],
    [12, -5.3873909174452],
    [14, -6.263549533547],
  ])('antiferromagnetic ring of %d: Bethe ansatz and published energy', (size, published) => {
    const energy = energyOf('xxz-chain', { size, coupling: 1, prepared: 'neel' });
    near(energy, betheEnergy(size));
    near(energy, published, 1e-11);
  });

  it.each([
    [4, -1.6160254037844],
    [6, -2.4935771338879],
    [8, -3.3749325986879],
    [10, -4.2580352072829],
  ])('open chain of %d', (size, published) => {
    near(energyOf('xxz-chain', { size, coupling: 1, parameters: { geometry: 'line' }, prepared: 'neel' }), published, 1e-12);
  });

  it.each([
    [0.5, [-1.686140661635, -2.36803398875, -3.086994355137, -3.819032780516]],
    [2, [-2.732050807569, -3.855772506636, -5.039428703947, -6.244583656209]],
    [-0.5, [-1.186140661635, -1.704757983078, -2.239078212171, -2.77941324638]],
  ])('anisotropy %d, rings of 4, 6, 8, 10', (coupling, published) => {
    published.forEach((energy, k) => near(energyOf('xxz-chain', { size: 4 + 2 * k, coupling, prepared: 'neel' }), energy, 1e-11));
  });

  it.each([-0.7, 0.3, 1.9])('ring of four at anisotropy %d: −(Δ + √(Δ² + 8))/2', (coupling) => {
    near(energyOf('xxz-chain', { size: 4, coupling, prepared: 'neel' }), -(coupling + Math.sqrt(coupling ** 2 + 8)) / 2);
  });

  it.each([4, 6, 8, 10])('XX ring of %d: free fermions, E_0 = −1/sin(π/L)', (size) => {
    // Two soluble models of an antiferromagnetic chain, Ann. Phys. 16, 407 (1961), DOI 10.1016/0003-4916(61)90115-4 (from memory)
    near(energyOf('xxz-chain', { size, coupling: 0, prepared: 'neel' }), -1 / Math.sin(Math.PI / size));
  });

  it.each([2, 3])('XX line of 6, %d up: all levels are sums of cos(πk/7)', (up) => {
    const occupation = Array.from({ length: 6 }, (_, x) => (x < up ? 1 : 0));
    const { matrix } = systemOf('xxz-chain', { size: 6, coupling: 0, parameters: { geometry: 'line' }, prepared: { occupation } });
    const modes = Array.from({ length: 6 }, (_, k) => Math.cos((Math.PI * (k + 1)) / 7));
    expectLevels(levelsOf(matrix), sumsOf(modes, up));
  });

  it('the dimer state of next neighbours with half the exchange: E_0 = −3L/8', () => {
    // On next-nearest-neighbor interaction in linear chain, J. Math. Phys. 10, 1388 (1969), DOI 10.1063/1.1664978 (from memory). Both dimer
    // states have this energy, so the level is asked for, not its vector.
    for (const size of [6, 8]) {
      const { matrix } = systemOf('xxz-chain', { size, coupling: 1, parameters: { 'next-J': 0.5 }, prepared: 'neel' });
      const levels = levelsOf(matrix);
      near(levels[0], (-3 * size) / 8);
      near(levels[1], (-3 * size) / 8);
    }
  });
});

describe('Ising chain in a transverse field', () => {
  // The one-dimensional Ising model with a transverse field, Ann. Phys. 57, 79 (1970), DOI 10.1016/0003-4916(70)90270-8 (from memory)
  const modeEnergy = (J: number, g: number, k: number): number => 2 * Math.sqrt(J * J + g * g - 2 * J * g * Math.cos(k));

  /** Antiperiodic momenta with an even number of fermions, periodic ones with an odd number; the k = 0 mode has the sign of g − J. */
  function freeFermionLevels(sites: number, J: number, g: number): number[] {
    const levels: number[] = [];
    for (const odd of [0, 1]) {
      const modes = Array.from({ length: sites }, (_, m) => {
        const k = ((2 * m + 1 - odd) * Math.PI) / sites;
        return odd === 1 && m === 0 ? 2 * (g - J) : modeEnergy(J, g, k);
      });
      const vacuum = -modes.reduce((a, b) => a + b, 0) / 2;
      for (let count = odd; count <= sites; count += 2) levels.push(...sumsOf(modes, count).map((sum) => vacuum + sum));
    }
    return levels;
  }

  it.each([
    [6, 1, 0.7],
    [6, 1, 1],
    [5, 0.8, 1.3],
  ])('ring of %d, J = %d, g = %d: the whole spectrum by free fermions', (size, J, g) => {
    const { matrix } = systemOf('ising-chain', { size, coupling: g, parameters: { J }, prepared: 'all-up' });
    expectLevels(levelsOf(matrix), freeFermionLevels(size, J, g));
  });

  it.each([
    [8, 1, -10.251661790966, 0.1969828067143],
    [8, 0.5, -8.5090822351403, 0.0014558475008],
    [8, 2, -17.0181644702805, null],
    [6, 0.7, -6.7828160575095, null],
    [4, 1, -5.2262518595055, null],
    [10, 1, -12.7849064429993, null],
  ])('ring of %d at g = %d', (size, coupling, energy, gap) => {
    const found = groundState(systemOf('ising-chain', { size, coupling, prepared: 'all-up' }).matrix);
    near(found.energy, energy, 1e-11);
    // The gap is asked for to 1e-9 of the norm only.
    if (gap !== null) near(found.gap, gap, 1e-8);
  });

  it.each([4, 8])('line of %d at J = g: E_0 = 1 − 1/sin(π/(2(2L + 1)))', (size) => {
    const energy = energyOf('ising-chain', { size, coupling: 1, parameters: { geometry: 'line' }, prepared: 'all-up' });
    near(energy, 1 - 1 / Math.sin(Math.PI / (2 * (2 * size + 1))));
  });
});

describe('spin one', () => {
  it('two spins: J[S(S + 1) − 4]/2 for S = 0, 1, 2', () => {
    const { matrix } = systemOf('spin-one-chain', { size: 2, coupling: 0, parameters: { geometry: 'line' }, prepared: 'neel' });
    expectLevels(levelsOf(matrix), [-2, -1, 1]);
  });

  it('ring of four: two spins of length two, E_0 = [0 − 6 − 6]/2 = −6', () => {
    near(energyOf('spin-one-chain', { size: 4, coupling: 0, prepared: 'neel' }), -6);
  });
});

describe('spinless fermions without interaction', () => {
  it.each([
    [6, 3, 0],
    [6, 2, 0],
    [7, 3, 0.35],
    [8, 4, 0.35],
  ])('ring of %d with %d: sums of −2J cos k − 2J₂ cos 2k', (size, particles, next) => {
    const parameters = { particles, 'next-J': next };
    const { matrix } = systemOf('fermion-chain', { size, coupling: 0, parameters, prepared: 'domain-wall' });
    const modes = Array.from({ length: size }, (_, m) => {
      const k = (2 * Math.PI * m) / size;
      return -2 * Math.cos(k) - 2 * next * Math.cos(2 * k);
    });
    expectLevels(levelsOf(matrix), sumsOf(modes, particles));
  });
});

describe('extended Bose–Hubbard', () => {
  it('two sites with V = U: free bosons shifted by U N(N − 1)/2 (closed form)', () => {
    const parameters = { particles: 5, U: 0.7, geometry: 'line' };
    const { matrix } = systemOf('extended-bose-hubbard-chain', { size: 2, coupling: 0.7, parameters, prepared: 'all-left' });
    expectLevels(
      levelsOf(matrix),
      [-5, -3, -1, 1, 3, 5].map((level) => level + 7),
    );
  });

  it('hard-core bosons on a line are free fermions', () => {
    const parameters = { particles: 3, most: 1, geometry: 'line' };
    const { matrix } = systemOf('extended-bose-hubbard-chain', { size: 6, coupling: 0, parameters, prepared: 'density-wave' });
    const modes = Array.from({ length: 6 }, (_, k) => -2 * Math.cos((Math.PI * (k + 1)) / 7));
    expectLevels(levelsOf(matrix), sumsOf(modes, 3));
  });
});

describe('collective spin', () => {
  const spins = Array.from({ length: 10 }, (_, k) => k - 4.5);

  it('no field: −λ m²/N; no interaction: −√(h² + bias²) m', () => {
    const ising = systemOf('collective-spin', { size: 9, coupling: 1.4, parameters: { field: 0 }, prepared: 'all-up' });
    expect(ising.matrix.dimension).toBe(1);
    near(levelsOf(ising.matrix)[0], (-1.4 * 4.5 ** 2) / 9);
    const free = systemOf('collective-spin', { size: 9, coupling: 0, parameters: { field: 0.6, bias: 0.8 }, prepared: 'all-up' });
    expectLevels(
      levelsOf(free.matrix),
      spins.map((m) => -m),
    );
  });

  it('γ = 1: −(λ/N)(S(S + 1) − m²) − h m, m along the field', () => {
    const { matrix } = systemOf('collective-spin', {
      size: 9,
      coupling: 1.4,
      parameters: { field: 0.6, anisotropy: 1 },
      prepared: 'all-up',
    });
    expectLevels(
      levelsOf(matrix),
      spins.map((m) => (-1.4 / 9) * (4.5 * 5.5 - m * m) - 0.6 * m),
    );
  });

  it('two spins: S = 1, by the characteristic polynomial: levels −λ/2 and [−λ ± √(λ² + 16h²)]/4', () => {
    const [lambda, h] = [1.3, 0.4];
    const { matrix } = systemOf('collective-spin', { size: 2, coupling: lambda, parameters: { field: h }, prepared: 'all-up' });
    const root = Math.sqrt(lambda ** 2 + 16 * h ** 2);
    expectLevels(levelsOf(matrix), [-lambda / 2, (-lambda + root) / 4, (-lambda - root) / 4]);
  });

  it('spins along the field are its ground state without interaction', () => {
    const { matrix, detected } = systemOf('collective-spin', { size: 30, coupling: 0, prepared: 'along-field' });
    const { vector, energy } = groundState(matrix);
    near(energy, -15);
    vector.re.forEach((amplitude, row) => near(amplitude, detected.re[row], 1e-12));
  });
});
