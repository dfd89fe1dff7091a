/** What the family `terms` refuses, and what makes two lists the same. */
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { findModel } from '../../../src/models/registry.js';
import { readSweep } from '../../../src/sweep/read.js';
import { requestOf, systemOf } from '../../support/model-requests.js';

const caught = (parameters: unknown, size = 4): WindrowError => {
  try {
    requestOf('terms', { size, parameters, prepared: 'neel' });
  } catch (error) {
    if (error instanceof WindrowError) return error;
    throw error;
  }
  throw new Error('nothing was thrown');
};

const one = (term: object, others: object = {}) => ({ ...others, terms: [{ product: 'Z Z', over: 'bonds', ...term }] });

describe('one error for', () => {
  it.each<[string, object, string, string, RegExp]>([
    ['no terms', {}, 'model.parameter', 'parameters.terms', /coefficient, product, over, hc/],
    ['an unknown operator', one({ product: 'Z W' }), 'model.parameter', 'parameters.terms.0.product', /Sz, S\+, S-/],
    ['Pauli matrices of spin one', one({}, { spin: 1 }), 'model.parameter', 'parameters.terms.0.product', /^Sz, S\+, S-, Sx, Sy$/],
    ['too few operators', one({ product: 'Z' }), 'model.parameter', 'parameters.terms.0.product', /2 operators/],
    ['half the places', one({ product: 'Z@1 Z' }), 'model.parameter', 'parameters.terms.0.product', /all of them/],
    ['a place too many', one({ product: 'Z@1 Z@3' }), 'model.parameter', 'parameters.terms.0.product', /1 to 2/],
    ['an odd number of fermions', one({ product: 'c n' }, { local: 'fermion' }), 'model.parameter', 'parameters.terms.0.product', /even/],
    ['a site that is not there', one({ over: [[1, 5]] }), 'model.parameter', 'parameters.terms.0.over.0', /from 1 to 4/],
    [
      'a site twice',
      one({
        over: [
          [1, 2],
          [3, 3],
        ],
      }),
      'model.parameter',
      'parameters.terms.0.over.1',
      /different sites/,
    ],
    ['lists of different lengths', one({ over: [[1, 2], [3]] }), 'model.parameter', 'parameters.terms.0.over.1', /2 sites/],
    ['a name without value', one({ coefficient: 'J' }), 'model.parameter', 'parameters.J', /finite number/],
    ['a value without use', one({}, { J: 1 }), 'model.parameter', 'parameters.J', /a term with that coefficient/],
    ['bosons without cut-off', one({ product: 'n n' }, { local: 'boson' }), 'model.parameter', 'parameters.most', /whole number/],
    ['a cut-off of spins', one({}, { most: 3 }), 'model.parameter', 'parameters.most', /null/],
    ['a spin of fermions', one({ product: 'n n' }, { local: 'fermion', spin: 1 }), 'model.parameter', 'parameters.spin', /null/],
    ['a spin that is none', one({}, { spin: 0.7 }), 'model.parameter', 'parameters.spin', /number/],
    [
      'too many states at once',
      one({ product: 'n@1 n@2 n@3', over: { stretch: 3 } }, { local: 'boson', most: 31 }),
      'model.parameter',
      'parameters.terms.0.product',
      /1024/,
    ],
    ['a coefficient that overflows', one({ coefficient: [1e308, 1e308] }), 'matrix.not-finite', 'parameters.terms.0.coefficient', /1e308/],
  ])('%s', (_, parameters, code, where, allowed) => {
    const error = caught(parameters);
    expect([error.code, error.details.where]).toEqual([code, where]);
    expect(error.details.allowed).toMatch(allowed);
  });

  it('more states than can be numbered', () => {
    const error = caught(one({ product: 'n n' }, { local: 'boson', most: 31 }), 11);
    expect([error.code, error.details.allowed]).toEqual(['model.size', 'at most 10 sites of 32 states']);
    const fits = { size: 10, parameters: one({ product: 'n n' }, { local: 'boson', most: 31 }), prepared: 'neel' };
    expect(() => requestOf('terms', fits)).not.toThrow();
  });
});

describe('a sum that is not Hermitian', () => {
  it.each<[string, object[], number]>([
    ['a hop in one direction', [{ product: 'S+ S-', over: 'bonds' }], 0],
    [
      'a product of operators that do not commute',
      [
        { product: 'Z Z', over: 'bonds' },
        { product: 'Sx Sz', over: 'sites' },
      ],
      1,
    ],
    ['an imaginary diagonal', [{ coefficient: 'i', product: 'Z', over: 'sites' }], 0],
    [
      'a conjugate with another factor',
      [
        { product: 'S+ S-', over: 'bonds' },
        { coefficient: 0.9, product: 'S- S+', over: 'bonds' },
      ],
      0,
    ],
    [
      'one of several bonds',
      [
        {
          product: 'S+ S-',
          over: [
            [1, 2],
            [2, 3],
          ],
        },
        { product: 'S+ S-', over: [[2, 1]] },
      ],
      0,
    ],
  ])('is refused with its term: %s', (_, terms, term) => {
    const error = caught({ terms });
    expect([error.code, error.details.where]).toEqual(['matrix.not-hermitian', `parameters.terms.${term}`]);
  });

  it('is told from one whose terms are Hermitian only together, on different sites', () => {
    // S⁺S⁻ + S⁻S⁺ = 1 on a spin half: the first two are S⁺ on the other site of a bond.
    const terms = [
      { product: 'S+@1 S+@2 S-@2', over: [[1, 2]] },
      { product: 'S+@1 S-@2 S+@2', over: [[1, 2]] },
      { product: 'S-', over: [[1]] },
    ];
    const { matrix } = systemOf('terms', { size: 2, parameters: { terms }, prepared: 'neel' });
    expect(matrix.dimension).toBe(2);
    expect(caught({ terms: terms.slice(0, 2) }, 2).code).toBe('matrix.not-hermitian');
    expect(caught({ terms: terms.slice(1) }, 2).code).toBe('matrix.not-hermitian');
  });
});

describe('sweep files', () => {
  const file = (changes: string): string => `
name: own
model: terms
size: 4
coupling: [0.5, 1]
parameters:
  J: { from: 1, to: 2, count: 3 }
  terms:
    - { coefficient: [J, coupling], product: Z Z, over: bonds }
${changes}
prepare: neel
schedules: [{ family: exponential, mean: 1 }]
budget: 100
`;

  it('have an axis for each coefficient, and a line for each fault', () => {
    expect(readSweep(file('    - { product: X, over: sites }')).parameters['J']?.values).toEqual([1, 1.5, 2]);
    const refused = (line: string): string => {
      try {
        readSweep(file(line));
      } catch (error) {
        return `${(error as WindrowError).code} ${(error as WindrowError).message} ${(error as WindrowError).details.line}`;
      }
      return 'read';
    };
    expect(refused('    - { product: S+ S-, over: bonds }')).toMatch(/^matrix.not-hermitian .* 10$/);
    expect(refused('    - { product: X, over: bonds }')).toMatch(/^model.parameter .* 10$/);
    expect(refused('    - { product: X, ovr: sites }')).toMatch(/^sweep\.(key|value) .* (9|10|8)$/);
  });
});

describe('the canonical form', () => {
  it('is the same for ways of writing that mean the same', () => {
    const family = findModel('terms');
    const canonical = (parameters: object) => family.canonical(requestOf('terms', { size: 4, parameters, prepared: 'neel' }));
    expect(canonical({ spin: 0.5, terms: [{ coefficient: [2], product: ' Z   Z ', over: { stretch: 2 }, hc: false }] })).toEqual(
      canonical({ terms: [{ coefficient: 2, product: 'Z Z', over: 'bonds' }] }),
    );
  });

  it('keeps names, so that a quench changes one of them', () => {
    const parameters = {
      J: 1,
      terms: [
        { coefficient: 'J', product: 'Z Z', over: 'bonds' },
        { coefficient: 'coupling', product: 'X', over: 'sites' },
      ],
    };
    const prepared = { 'ground-state': { parameters: { J: -0.4 }, coupling: 0.9 } };
    expect(systemOf('terms', { size: 4, parameters, prepared }).sectorDimension).toBe(16);
  });
});
