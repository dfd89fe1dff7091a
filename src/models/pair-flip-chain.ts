/** Neighbours of equal colour change their colour together: aa <-> bb. */
import { z } from 'zod';
import { chargeRule, freeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { checkOnsite, geometryParameter, onsiteParameter, randomParameter, siteEnergies, termAmplitudes, windows } from './lattice.js';
import { localMoves, repeated } from './local-moves.js';
import type { LocalTerm } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import type { ProductBasis, SystemRequest } from './types.js';

const COLOURS = 'abcdefgh';

const parameters = z.strictObject({
  colours: z.int().min(2).max(COLOURS.length).default(3).describe('number m of colours a site takes'),
  geometry: geometryParameter,
  onsite: onsiteParameter,
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

const symbols = ({ parameters: { colours } }: Request): string => COLOURS.slice(0, colours);

function basis(request: Request): ProductBasis {
  const { size, coupling, disorder, parameters } = request;
  const { geometry, onsite, random } = parameters;
  const energies = siteEnergies(onsite, random === 'hops' ? null : disorder, size);
  const pairs = windows(size, 2, geometry);
  const alphabet = symbols(request);
  const flips = Array.from(alphabet).flatMap((a, k) =>
    Array.from(alphabet.slice(k + 1), (b): LocalTerm => {
      const amplitudes = termAmplitudes(coupling, disorder, random, pairs.length, a + b);
      return { windows: pairs, amplitudes, moves: [[a + a, b + b]] };
    }),
  );
  return {
    sites: size,
    levels: alphabet.length,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += energies[x] * c[x];
      return energy;
    },
    connect: localMoves(alphabet, flips),
  };
}

/**
 * H = g Σ_x Σ_{a≠b} |aa><bb|_{x,x+1} + Σ ε_x c_x, c = 0 … m − 1 the number of the colour a, b, …. On a line and on rings of even length
 * it conserves N_a(odd sites) − N_a(even sites) of every colour; the dimension counts the configurations with those of φ. Random hops draw an
 * amplitude for every bond and pair of colours.
 */
export const pairFlipChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'pair-flip-chain',
  summary: 'Pair flips aa <-> bb of m colours: H = g Σ_x Σ_{a≠b} |aa><bb|_{x,x+1} + Σ_x ε_x c_x, with colours c = 0 … m−1.',
  source:
    'The pair-flip model: a very entangled translationally invariant spin chain, arXiv:1805.07168; Hilbert space fragmentation and commutant ' +
    'algebras, Phys. Rev. X 12, 011050 (2022), DOI 10.1103/PhysRevX.12.011050',
  energyUnit: 'that of the flip amplitude g, usually g = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 2, maximum: 24 },
  coupling: { symbol: 'g', meaning: 'amplitude of a flip' },
  scales: [{ name: 'g', meaning: 'the amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'one-colour', meaning: 'every site of colour a', terms: ({ size }) => repeated(COLOURS, size, 'a') },
    { name: 'alternating', meaning: 'colours a and b by turns: no pair, frozen', terms: ({ size }) => repeated(COLOURS, size, 'ab') },
    { name: 'paired', meaning: 'aabb repeated', terms: ({ size }) => repeated(COLOURS, size, 'aabb') },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: (request) => localLabels(request.size, symbols(request)),
  rule({ size, parameters: { colours, geometry } }) {
    if (geometry === 'ring' && size % 2 === 1 && size > 2) return freeRule(size, colours);
    const sign = (site: number): number => (site % 2 === 0 ? 1 : -1);
    return chargeRule(size, colours, (value, site) => Array.from({ length: colours }, (_, a) => (a === value ? sign(site) : 0)));
  },
  moves: ({ size, parameters: { colours } }) => size * (colours - 1),
  fragmented: true,
  basis,
});
