/** Your own Hamiltonian: a list of terms, each a product of local operators summed over sites, bonds or given lists of sites. */
import { canonicalJson } from '../../core/json.js';
import type { Json } from '../../core/json.js';
import { chargeRule, freeRule } from '../configuration-space.js';
import { localLabels, occupationLabels } from '../labels.js';
import { defineProductFamily } from '../product-family.js';
import { refusal } from '../refusal.js';
import { remember } from '../remember.js';
import { basisState } from '../states.js';
import type { Term } from '../states.js';
import { localSpace, termHamiltonian } from './hamiltonian.js';
import type { TermRequest } from './hamiltonian.js';
import { parameters } from './term-schema.js';
import type { TermForm, TermParameters } from './term-schema.js';

/** Configurations are told apart by their number, which has to be exact. */
const MOST_STATES = 2 ** 53;

const hamiltonian = remember(
  4,
  ({ size, coupling, parameters: given, disorder }: TermRequest) =>
    canonicalJson({ size, coupling, parameters: given, disorder } as unknown as Json),
  termHamiltonian,
);

/** No value that a term list is written for: what is conserved at it is conserved at all of them. */
const GENERIC = 0.754_877_666_246_692_8;

const conservesGenerally = remember(
  16,
  ({ size, parameters: given }: TermRequest) => canonicalJson({ size, parameters: given }),
  (request: TermRequest) =>
    termHamiltonian({ ...request, coupling: GENERIC, disorder: { strength: GENERIC, seed: 0, realisation: 0 } }).conserves,
);

/** An element may be rounding beside the generic values that cancel there and stand out beside the given ones, so these are asked too. */
const conserves = (request: TermRequest): boolean => conservesGenerally(request) && hamiltonian(request).conserves;

/** One way of writing for terms that are the same: the words for stretches of one and two sites, no lists of one factor. */
function canonicalTerm(term: TermForm): TermForm {
  const { coefficient, product, over } = term;
  const stretch = typeof over === 'object' && 'stretch' in over ? over.stretch : 0;
  return {
    ...term,
    coefficient: Array.isArray(coefficient) && coefficient.length === 1 ? coefficient[0] : coefficient,
    product: product
      .split(/\s+/)
      .filter((word) => word !== '')
      .join(' '),
    over: stretch === 1 ? 'sites' : stretch === 2 ? 'bonds' : over,
  };
}

function checkParameters(request: TermRequest): void {
  const { levels } = localSpace(request.parameters);
  if (levels ** request.size > MOST_STATES) {
    const most = Math.floor(53 / Math.log2(levels) + 1e-12);
    throw refusal(
      'model.size',
      'these sites have more states than can be numbered',
      'size',
      request.size,
      `at most ${most} sites of ${levels} states`,
    );
  }
  hamiltonian(request);
}

/** The basis state with the given one of each two extremes: true for the highest value of a site. */
const extremes = ({ size, parameters: given }: TermRequest, highest: (x: number) => boolean): readonly Term[] =>
  basisState(Array.from({ length: size }, (_, x) => (highest(x) ? localSpace(given).levels - 1 : 0)));

/** H as its terms say; conserves the sum of the values of all sites (particles, magnetisation) where every term does. */
export const termList = defineProductFamily<TermParameters>({
  name: 'terms',
  summary:
    'Your own Hamiltonian on spins, bosons or fermions: H = Σ (coefficient × Σ_lists of sites product of local operators), as the terms say.',
  source:
    'common practice; signs of fermions: Über das Paulische Äquivalenzverbot, Z. Phys. 47, 631 (1928), DOI 10.1007/BF01331938 (from memory)',
  energyUnit: 'that of the coefficients',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 1, maximum: 53 },
  coupling: { symbol: 'coupling', meaning: 'the value of the name coupling in the coefficients' },
  scales: [{ name: 'coupling', meaning: 'the value itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  complete: (given) => ({
    ...given,
    spin: given.local === 'spin' ? (given.spin ?? 0.5) : given.spin,
    terms: given.terms.map(canonicalTerm),
  }),
  states: [
    {
      name: 'neel',
      meaning: 'sites 1, 3, 5, … in their highest state (up, full), the others in their lowest',
      terms: (request) => extremes(request, (x) => x % 2 === 0),
    },
    {
      name: 'domain-wall',
      meaning: 'the left half in the highest state, the right half in the lowest',
      terms: (request) => extremes(request, (x) => 2 * x < request.size),
    },
    { name: 'all-high', meaning: 'every site in its highest state', terms: (request) => extremes(request, () => true) },
    { name: 'all-low', meaning: 'every site in its lowest state', terms: (request) => extremes(request, () => false) },
  ],
  checkParameters,
  labels({ size, parameters: given }) {
    const { levels, symbols } = localSpace(given);
    return symbols === null ? occupationLabels({ sites: size, levels, total: null, unit: 'quanta' }) : localLabels(size, symbols);
  },
  rule(request) {
    const { levels } = localSpace(request.parameters);
    return conserves(request) ? chargeRule(request.size, levels, (value) => [value]) : freeRule(request.size, levels);
  },
  moves: (request) => hamiltonian(request).most,
  complex: (request) => hamiltonian(request).complex,
  fragmented: 'by coupling',
  basis: hamiltonian,
});
