/** Spin-one chain that conserves the magnetisation and its dipole moment, with moves on three and on four sites. */
import { z } from 'zod';
import { dipoleRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { checkOnsite, fieldParameter, geometryParameter, randomParameter, siteEnergies, termAmplitudes, windows } from './lattice.js';
import { halves, localMoves, repeated } from './local-moves.js';
import type { LocalTerm } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import type { ProductBasis, SystemRequest } from './types.js';

const SPINS = '-0+';

/** S⁺ has the element √2 between neighbouring values of S^z: four of them in every term. */
const ELEMENT = 4;

const parameters = z.strictObject({
  J3: z.number().default(1).describe('amplitude of the three-site term'),
  geometry: geometryParameter,
  field: fieldParameter,
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;
type Move = readonly [string, string, number];

const raise = (spin: string): string => SPINS[SPINS.indexOf(spin) + 1];

/** S⁺(S⁻)²S⁺: (a, +, b) <-> (a + 1, −, b + 1) */
const THREE: readonly Move[] = ['-', '0'].flatMap((a) => ['-', '0'].map((b) => [`${a}+${b}`, `${raise(a)}-${raise(b)}`, ELEMENT] as const));

/** S⁺S⁻S⁻S⁺: (a, b, c, d) <-> (a + 1, b − 1, c − 1, d + 1) */
const FOUR: readonly Move[] = ['-', '0'].flatMap((a) =>
  ['-', '0'].flatMap((b) =>
    ['-', '0'].flatMap((c) =>
      ['-', '0'].map((d) => [`${a}${raise(b)}${raise(c)}${d}`, `${raise(a)}${b}${c}${raise(d)}`, ELEMENT] as const),
    ),
  ),
);

function basis({ size, coupling, disorder, parameters: { J3, geometry, field, random } }: Request): ProductBasis {
  const fields = siteEnergies(field, random === 'hops' ? null : disorder, size);
  const three = windows(size, 3, geometry);
  const four = coupling === 0 ? [] : windows(size, 4, geometry);
  // Patterns are drawn one by one: with one factor a stretch, the largest sectors keep the degeneracies of free particles.
  const groups = (patterns: readonly Move[]): (readonly Move[])[] => (random === 'onsite' ? [patterns] : patterns.map((move) => [move]));
  const moves = (stretches: typeof three, amplitude: number, patterns: readonly Move[]): LocalTerm[] =>
    groups(patterns).map((group) => ({
      windows: stretches,
      amplitudes: termAmplitudes(amplitude, disorder, random, stretches.length, group[0][0]),
      moves: group,
    }));
  return {
    sites: size,
    levels: 3,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += fields[x] * (c[x] - 1);
      return energy;
    },
    connect: localMoves(SPINS, [...moves(three, -J3, THREE), ...moves(four, -coupling, FOUR)]),
  };
}

/**
 * H = −J₃ Σ [S⁺_{x−1} (S⁻_x)² S⁺_{x+1} + h.c.] − J₄ Σ [S⁺_x S⁻_{x+1} S⁻_{x+2} S⁺_{x+3} + h.c.] + Σ h_x S^z_x. Conserves Q = Σ S^z_x and
 * P = Σ x S^z_x (on a ring modulo L); the dimension counts the configurations with those of φ. J₄ = 0 leaves the three-site term alone, also
 * under disorder: strongly fragmented. Random hops draw an amplitude for every stretch of sites and pair of patterns. Values: 0, 1, 2 for S^z = −1, 0, 1.
 */
export const dipoleSpinOneChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'dipole-spin-one-chain',
  summary:
    'Dipole-conserving spin-one chain: H = −J₃ Σ_x [S⁺_{x−1}(S⁻_x)²S⁺_{x+1} + h.c.] − J₄ Σ_x [S⁺_x S⁻_{x+1} S⁻_{x+2} S⁺_{x+3} + h.c.] + Σ_x h_x Sᶻ_x.',
  source:
    'Ergodicity breaking arising from Hilbert space fragmentation in dipole-conserving Hamiltonians, Phys. Rev. X 10, 011047 (2020), ' +
    'DOI 10.1103/PhysRevX.10.011047',
  energyUnit: 'that of the three-site amplitude J₃, usually J₃ = 1',
  size: { symbol: 'L', meaning: 'number of spins', minimum: 3, maximum: 32 },
  coupling: { symbol: 'J₄', meaning: 'amplitude of the four-site term; 0 is the strongly fragmented chain' },
  scales: [{ name: 'J4', meaning: 'the four-site amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'all-zero', meaning: 'every spin in Sᶻ = 0', terms: ({ size }) => repeated(SPINS, size, '0') },
    { name: 'neel', meaning: '+ on sites 1, 3, 5, …, − on the others', terms: ({ size }) => repeated(SPINS, size, '+-') },
    { name: 'domain-wall', meaning: 'the left half +, the right half −', terms: ({ size }) => halves(SPINS, size, '+', '-') },
    { name: 'dilute-neel', meaning: '0 + 0 − repeated', terms: ({ size }) => repeated(SPINS, size, '0+0-') },
  ],
  checkParameters: ({ size, parameters: { field } }) => checkOnsite(field, size, 'field'),
  labels: ({ size }) => localLabels(size, SPINS),
  rule: ({ size, parameters: { geometry } }) => dipoleRule(size, 3, geometry === 'ring', (value) => value - 1),
  moves: ({ size }) => 2 * size,
  fragmented: true,
  basis,
});
