/**
 * How many levels a product state reaches inside its sector: fewer than the sector holds while amplitudes are equal, all of them once
 * amplitudes and diagonal are random (bipartite hops alone keep zero modes together). Sector sizes and counts by 60-digit and brute-force
 * computation; sources of the models are named in tests/reference/fragmentation.test.ts.
 */
import { describe, expect, it } from 'vitest';
import { spectralMeasure } from '../../src/spectral/measure.js';
import { systemOf } from '../support/model-requests.js';

const SEED = { seed: 11, realisation: 0 };

const accessible = (model: string, size: number, product: string, parameters: object, random: 'onsite' | 'hops' | 'both' | null) => {
  const { fields } = spectralMeasure(
    systemOf(model, {
      size,
      coupling: COUPLING[model] ?? 1,
      parameters: { ...parameters, ...(random === null ? {} : { random }) },
      disorder: random === null ? null : { strength: 0.8, ...SEED },
      prepared: { product },
    }),
  );
  return [fields.sector_dimension, fields.accessible_dimension];
};

/** Couplings that add to the moves are left out. */
const COUPLING: Record<string, number> = { 't-jz-chain': 0, 'dipole-spin-one-chain': 0 };
const line = { geometry: 'line' };

describe('uniform amplitudes, random ones, and a random diagonal as well', () => {
  it.each([
    ['t-jz-chain', 6, 'ud0000', line, [15, 13, 13, 15]],
    ['t-jz-chain', 6, 'ud0000', { geometry: 'ring' }, [30, 11, 25, 30]],
    ['dipole-spin-one-chain', 7, '0+-+-+0', line, [20, 8, 20, 20]],
    ['dipole-spin-one-chain', 8, '0+-+-+-0', line, [35, 8, 33, 35]],
    ['pair-flip-chain', 4, 'aabb', line, [15, 8, 15, 15]],
    ['folded-xxz-chain', 8, '01001000', line, [10, 8, 8, 10]],
  ] as const)('%s on %d sites from %s, %j', (model, size, product, parameters, [sector, uniform, hops, both]) => {
    expect(accessible(model, size, product, parameters, null)).toEqual([sector, uniform]);
    expect(accessible(model, size, product, parameters, 'hops')).toEqual([sector, hops]);
    expect(accessible(model, size, product, parameters, 'both')).toEqual([sector, both]);
  });

  it('Lanczos would not stop there, the weights count: 23 for the vacuum of a blockade ring of 12, 22 for Néel of a Heisenberg ring of 10', () => {
    const blockade = spectralMeasure(systemOf('pxp-chain', { size: 12, coupling: 0, prepared: 'vacuum' })).fields;
    expect([blockade.sector_dimension, blockade.accessible_dimension]).toEqual([322, 23]);
    const heisenberg = spectralMeasure(systemOf('xxz-chain', { size: 10, coupling: 1, prepared: 'neel' })).fields;
    expect([heisenberg.sector_dimension, heisenberg.accessible_dimension]).toEqual([252, 22]);
    const open = spectralMeasure(systemOf('pxp-chain', { size: 8, coupling: 0, parameters: line, prepared: 'vacuum' })).fields;
    expect([open.sector_dimension, open.accessible_dimension]).toEqual([55, 29]);
  });
});
