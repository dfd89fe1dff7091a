/** States that are built: product texts, random and uniform states, ground states of another coupling. */
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { findModel } from '../../../src/models/registry.js';
import type { StateVector } from '../../../src/linalg/matrix.js';
import { applyMatrix } from '../../../src/linalg/apply.js';
import { requestOf, systemOf } from '../../support/model-requests.js';
import type { Asked } from '../../support/model-requests.js';

const caught = (action: () => unknown): WindrowError => {
  try {
    action();
  } catch (error) {
    if (error instanceof WindrowError) return error;
    throw error;
  }
  throw new Error('nothing was thrown');
};

const canonical = (model: string, asked: Asked) => findModel(model).canonical(requestOf(model, asked)).prepared;
const overlap = (a: StateVector, b: StateVector): number => a.re.reduce((sum, x, i) => sum + x * b.re[i], 0);

describe('product states', () => {
  it('are occupations written with one character a site', () => {
    expect(canonical('xxz-chain', { size: 5, prepared: { product: 'uddud' } })).toEqual({ occupation: [1, 0, 0, 1, 0] });
    expect(canonical('dipole-spin-one-chain', { size: 5, prepared: { product: '0+-+0' } })).toEqual({ occupation: [1, 2, 0, 2, 1] });
    expect(canonical('t-jz-chain', { size: 4, prepared: { product: '0du0' } })).toEqual({ occupation: [0, 2, 1, 0] });
    expect(canonical('bose-hubbard-chain', { size: 3, prepared: { product: '201' } })).toEqual({ occupation: [2, 0, 1] });
  });

  it('have the first name that means them', () => {
    expect(canonical('xxz-chain', { size: 4, prepared: { product: 'udud' } })).toBe('neel');
    expect(canonical('pxp-chain', { size: 6, prepared: { occupation: [0, 0, 0, 0, 0, 0] } })).toBe('vacuum');
  });

  it.each<[string, string, unknown, string, RegExp]>([
    ['a stray character', 'xxz-chain', { product: 'uu1d' }, 'prepare.product', /^d, u$/],
    ['too short', 'xxz-chain', { product: 'ud' }, 'prepare.product', /4 whole numbers/],
    ['not a text', 'pxp-chain', { product: 101 }, 'prepare.product', /quoted text/],
    ['excited neighbours under blockade', 'pxp-chain', { product: '1100' }, 'prepare.product', /number of sites/],
    ['excited neighbours around the ring', 'pxp-chain', { product: '1001' }, 'prepare.product', /number of sites/],
    ['a colour that is not there', 'pair-flip-chain', { product: 'abcd' }, 'prepare.product', /^a, b, c$/],
  ])('refuses %s', (_what, model, prepared, where, allowed) => {
    const error = caught(() => requestOf(model, { size: 4, prepared }));
    expect(error).toMatchObject({ code: 'state.invalid', details: { where } });
    expect(error.details.allowed).toMatch(allowed);
  });
});

describe('random states', () => {
  it('are basis states, fixed by the seed, written as such', () => {
    const drawn = (seed: number, like?: unknown) =>
      canonical('xxz-chain', { size: 12, prepared: { random: { seed, ...(like === undefined ? {} : { like }) } } });
    expect(drawn(3)).toEqual(drawn(3));
    expect(drawn(3)).not.toEqual(drawn(4));
    for (let seed = 0; seed < 8; seed += 1) {
      const held = (drawn(seed, 'magnon') as { occupation: number[] }).occupation ?? [];
      if (held.length > 0) expect(held.reduce((a, b) => a + b, 0)).toBe(1);
    }
  });

  it('are drawn evenly from the allowed configurations', () => {
    const family = findModel('pxp-chain');
    const { space } = family.productSpace!(requestOf('pxp-chain', { size: 6, prepared: 'vacuum' }), 'whole');
    const DRAWS = 3600;
    const counts = new Array<number>(space.dimension).fill(0);
    for (let seed = 0; seed < DRAWS; seed += 1) {
      const { detected, matrix } = systemOf('pxp-chain', { size: 6, prepared: { random: { seed } } });
      expect(matrix.dimension).toBe(18);
      counts[detected.re.indexOf(1)] += 1;
    }
    // χ² with 17 degrees of freedom passes 40.8 once in a thousand (common practice).
    const expected = DRAWS / 18;
    expect(counts.reduce((sum, count) => sum + (count - expected) ** 2 / expected, 0)).toBeLessThan(40.8);
  });

  it('refuses families without configurations to draw, and draws without a seed', () => {
    expect(caught(() => requestOf('bose-hubbard-dimer', { size: 4, prepared: { random: { seed: 1 } } })).message).toMatch(/no random/);
    const error = caught(() => requestOf('xxz-chain', { size: 4, prepared: { random: {} } }));
    expect(error).toMatchObject({ code: 'state.invalid', details: { where: 'prepare.random.seed' } });
    expect(caught(() => requestOf('xxz-chain', { size: 4, prepared: { random: { sed: 1 } } })).details).toMatchObject({
      where: 'prepare.random.sed',
      allowed: 'seed, like',
    });
  });
});

describe('uniform states', () => {
  it('hold every configuration alike, or those with the conserved numbers of a state', () => {
    const all = systemOf('xxz-chain', { size: 4, prepared: 'uniform' });
    expect([all.sectorDimension, all.hilbertDimension]).toEqual([16, 16]);
    all.detected.re.forEach((x) => expect(x).toBeCloseTo(0.25, 15));
    const neel = systemOf('xxz-chain', { size: 4, prepared: { uniform: { like: 'neel' } } });
    expect([neel.sectorDimension, neel.hilbertDimension]).toEqual([6, 6]);
    neel.detected.re.forEach((x) => expect(x).toBeCloseTo(1 / Math.sqrt(6), 15));
    expect(canonical('xxz-chain', { size: 4, prepared: { uniform: { like: { product: 'udud' } } } })).toEqual({
      uniform: { like: 'neel' },
    });
  });

  it('says when there are too many', () => {
    const error = caught(() => requestOf('ising-chain', { size: 30, prepared: 'uniform' }));
    expect(error).toMatchObject({ code: 'state.invalid', details: { where: 'prepare', allowed: 'at most 1048576 basis states' } });
  });
});

describe('ground states', () => {
  const residual = (asked: Asked, model = 'xxz-chain'): number => {
    const { detected } = systemOf(model, { ...asked, prepared: { 'ground-state': {} } });
    const { matrix } = systemOf(model, asked);
    const image = { re: new Float64Array(matrix.dimension), im: null };
    applyMatrix(matrix, detected, image);
    const energy = overlap(detected, image);
    return Math.sqrt(image.re.reduce((sum, x, i) => sum + (x - energy * detected.re[i]) ** 2, 0));
  };

  it('of the same coupling is an eigenvector, so it is its own only bright level', () => {
    // Norm about ten, some ulp.
    expect(residual({ size: 8, coupling: 0.7, prepared: 'neel' })).toBeLessThan(1e-13);
    expect(residual({ size: 6, coupling: 3.4, prepared: 'unit-filling' }, 'bose-hubbard-chain')).toBeLessThan(1e-12);
  });

  it('of the two-level system is the closed form', () => {
    const { detected } = systemOf('two-level', {
      size: 2,
      coupling: 5,
      prepared: { 'ground-state': { coupling: 1.5, parameters: { bias: 4 } } },
    });
    // H = −1.5 σx + 2 σz: energy −2.5, vector (1.5, 2 + 2.5)/norm.
    const norm = Math.hypot(1.5, 4.5);
    expect(detected.re[0]).toBeCloseTo(1.5 / norm, 14);
    expect(detected.re[1]).toBeCloseTo(4.5 / norm, 14);
  });

  it('of a ring with flux is complex', () => {
    const { detected } = systemOf('tight-binding', { size: 5, parameters: { phase: 0.4 }, prepared: { 'ground-state': { coupling: 1 } } });
    // The lowest level of E_k = −2 cos(2πk/5 − 0.4) has k = 0: all amplitudes alike.
    detected.re.forEach((x, i) => expect(Math.hypot(x, detected.im?.[i] ?? 0)).toBeCloseTo(1 / Math.sqrt(5), 13));
  });

  it("reads scales, keeps to the sector of a state, and is written in the family's own coupling", () => {
    const prepared = { 'ground-state': { coupling: 2, as: 'U/J', within: { occupation: [0, 2] } } };
    const asked = { size: 2, parameters: { J: 0.5 }, prepared };
    expect(canonical('bose-hubbard-chain', asked)).toEqual({ 'ground-state': { coupling: 1, within: 'all-right' } });
    const magnon = systemOf('xxz-chain', { size: 6, prepared: { 'ground-state': { coupling: 0, within: 'magnon' } } });
    expect(magnon.hilbertDimension).toBe(6);
    expect(canonical('xxz-chain', { size: 6, coupling: 0.3, prepared: { 'ground-state': {} } })).toEqual({
      'ground-state': { coupling: 0.3, within: 'neel' },
    });
  });

  it('takes part in superpositions', () => {
    const prepared = {
      superposition: [
        [1, { 'ground-state': { coupling: 2 } }],
        [[0, 1], 'neel'],
      ],
    };
    const { detected } = systemOf('xxz-chain', { size: 6, prepared });
    expect(Math.hypot(...detected.re, ...(detected.im ?? []))).toBeCloseTo(1, 13);
    expect(detected.im?.filter((x) => x !== 0)).toHaveLength(1);
  });

  it.each<[string, string, object, number, RegExp, RegExp | string]>([
    ['degenerate', 'ising-chain', { coupling: 0, parameters: { J: 0 }, within: 'uniform' }, 4, /degenerate/, 'prepare.ground-state'],
    ['a hopeless size', 'ising-chain', {}, 20, /too large/, 'prepare.ground-state'],
    ['an unknown scale', 'ising-chain', { coupling: 1, as: 'g/h' }, 4, /no such scale/, 'prepare.ground-state.as'],
    ['a coupling that is a text', 'ising-chain', { coupling: 'strong' }, 4, /not a number/, 'prepare.ground-state.coupling'],
    ['an unknown parameter', 'ising-chain', { parameters: { K: 1 } }, 4, /parameter/, /prepare\.ground-state\.parameters/],
    [
      'a parameter of the wrong length',
      'ising-chain',
      { parameters: { field: [1, 2] } },
      4,
      /2 energies/,
      'prepare.ground-state.parameters.field',
    ],
    ['an unknown key', 'ising-chain', { couplng: 1 }, 4, /no such key/, 'prepare.ground-state.couplng'],
    ['a state that is not there', 'ising-chain', { within: 'vacuum' }, 4, /no state "vacuum"/, 'prepare.ground-state.within'],
  ])('refuses %s', (_what, model, quench, size, message, where) => {
    const error = caught(() => requestOf(model, { size, prepared: { 'ground-state': quench } }));
    expect(error.message).toMatch(message);
    expect(error.details.where).toMatch(where);
  });

  it('nested without end is refused', () => {
    let state: unknown = 'neel';
    for (let depth = 0; depth < 40; depth += 1) state = { uniform: { like: state } };
    expect(caught(() => requestOf('xxz-chain', { size: 4, prepared: state })).message).toMatch(/nested too deeply/);
  });
});
