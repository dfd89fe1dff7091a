/** Arbitrary term lists: Hermitian ones by construction, and anything at all. */
import fc from 'fast-check';
import type { RawRequest } from '../../src/models/request.js';

const number = fc.double({ min: -3, max: 3, noNaN: true });

interface Sites {
  readonly local: 'spin' | 'boson' | 'fermion';
  readonly spin?: number;
  readonly most?: number;
  readonly operators: readonly string[];
}

const SITES: readonly Sites[] = [
  { local: 'spin', operators: ['Sx', 'Sy', 'Sz', 'S+', 'S-', 'X', 'Y', 'Z'] },
  { local: 'spin', spin: 1, operators: ['Sx', 'Sy', 'Sz', 'S+', 'S-'] },
  { local: 'spin', spin: 1.5, operators: ['Sx', 'Sz', 'S+', 'S-'] },
  { local: 'boson', most: 2, operators: ['b', 'bdag', 'n'] },
  { local: 'fermion', operators: ['n', 'cdag@1 c@2', 'c@1 cdag@2', 'c@2 c@1', 'n@1 n@2'] },
];

const overs = fc.constantFrom<unknown>(
  'bonds',
  'next-bonds',
  { stretch: 2 },
  [[1, 2]],
  [
    [3, 1],
    [2, 3],
  ],
);
const coefficients = fc.oneof(number, fc.constantFrom<unknown>('coupling', 'J', 'random', ['i', 'coupling'], [0.5, 'J', 'J']));

function productOf(sites: Sites): fc.Arbitrary<{ product: string; over: unknown }> {
  const operator = fc.constantFrom(...sites.operators.filter((name) => !name.includes('@')));
  const onSites = fc.array(operator, { minLength: 1, maxLength: 3 }).map((words) => ({ product: words.join(' '), over: 'sites' }));
  const pair =
    sites.local === 'fermion'
      ? fc.constantFrom(...sites.operators.filter((name) => name.includes('@')))
      : fc.tuple(operator, operator).map(([a, b]) => `${a} ${b}`);
  return fc.oneof(onSites, fc.record({ product: pair, over: overs }));
}

/** Each term with its conjugate: Hermitian whatever the coefficients. Three or four sites. */
export const hermitianTermRequests: fc.Arbitrary<RawRequest> = fc.constantFrom(...SITES).chain((sites) =>
  fc
    .record({
      size: fc.integer({ min: 3, max: sites.spin === undefined ? 4 : 3 }),
      coupling: number,
      geometry: fc.constantFrom('ring', 'line'),
      terms: fc.array(
        fc.tuple(productOf(sites), coefficients).map(([term, coefficient]) => ({ ...term, coefficient, hc: true })),
        { minLength: 1, maxLength: 4 },
      ),
      J: number,
      disorder: fc.option(fc.record({ strength: fc.double({ min: 0, max: 2, noNaN: true }), seed: fc.nat(), realisation: fc.nat(9) })),
      prepared: fc.constantFrom<unknown>('neel', 'domain-wall', 'all-high', 'uniform', { random: { seed: 3 } }),
      detected: fc.constantFrom<unknown>('same', 'all-low', 'neel'),
    })
    .map(({ geometry, terms, J, ...request }) => {
      const { local, spin, most } = sites;
      const used = terms.some((term) => JSON.stringify(term.coefficient).includes('J'));
      const given = { local, ...(spin === undefined ? {} : { spin }), ...(most === undefined ? {} : { most }), ...(used ? { J } : {}) };
      return { ...request, parameters: { ...given, geometry, terms } };
    }),
);

const words = fc.constantFrom(
  'Sx',
  'Sy',
  'Sz',
  'S+',
  'S-',
  'X',
  'Y',
  'Z',
  'b',
  'bdag',
  'n',
  'c',
  'cdag',
  'Q',
  '@',
  'n@1',
  'X@2',
  'S+@9',
  'c@0',
  '',
);
const junk = fc.oneof(
  fc.jsonValue() as fc.Arbitrary<unknown>,
  fc.constantFrom<unknown>(1e308, -1e308, 1e-320, 'i', 'J', 'coupling', 'random'),
);
const mostly = (value: fc.Arbitrary<unknown>): fc.Arbitrary<unknown> =>
  fc.oneof({ weight: 9, arbitrary: value }, { weight: 1, arbitrary: junk });

/** Parameters that may be wrong in every way. */
const anything: fc.Arbitrary<Record<string, unknown>> = fc.record(
  {
    local: mostly(fc.constantFrom('spin', 'boson', 'fermion')),
    spin: mostly(fc.constantFrom(null, 0.5, 1, 15.5)),
    most: mostly(fc.constantFrom(null, 1, 3, 31)),
    geometry: mostly(fc.constantFrom('ring', 'line')),
    J: mostly(number),
    terms: mostly(
      fc.array(
        fc.record(
          {
            product: mostly(
              fc.oneof(
                fc.array(words, { maxLength: 13 }).map((list) => list.join(' ')),
                fc.string(),
              ),
            ),
            over: mostly(
              fc.oneof(overs, fc.constantFrom<unknown>('sites', { stretch: 12 }), fc.array(fc.array(fc.integer({ min: -1, max: 60 })))),
            ),
            coefficient: mostly(coefficients),
            hc: mostly(fc.boolean()),
          },
          { requiredKeys: ['product', 'over'] },
        ),
        { maxLength: 6 },
      ),
    ),
  },
  { requiredKeys: ['terms'] },
);

/** Right ones of which conjugates are left out, or one value is replaced. */
const damaged: fc.Arbitrary<Record<string, unknown>> = fc
  .tuple(hermitianTermRequests, fc.constantFrom('hc', 'product', 'over', 'coefficient', 'none'), fc.oneof(junk, words, fc.boolean()))
  .map(([{ parameters }, key, value]) => {
    const given = parameters as { readonly terms: readonly Record<string, unknown>[] };
    return { ...given, terms: given.terms.map((term, index) => (index === 0 && key !== 'none' ? { ...term, [key]: value } : term)) };
  });

/** Parameters of the family `terms`, mostly wrong ones. */
export const anyTermParameters = fc.oneof(anything, damaged);
