import { describe, expect, it } from 'vitest';
import { sectorSeries } from '../../../src/cli/sector-series.js';
import { documentFromJson } from '../../../src/sweep/read.js';
import { smallSweep, type Mapping } from '../../support/small-sweep.js';

const series = (changes: Mapping, scope: 'conserved' | 'whole' = 'whole', memory = Infinity) =>
  sectorSeries(documentFromJson(smallSweep({ schedules: [{ family: 'exponential', mean: 1 }], budget: 10, ...changes })), scope, memory);

const line = { geometry: 'line' };

describe('sectorSeries', () => {
  it('counts the sectors of every size, ascending, with those of the detected state', () => {
    // Statistical localization: from strong fragmentation to strong edge modes, Phys. Rev. B 101, 125126 (2020), 10.1103/PhysRevB.101.125126
    const [tJz, ...others] = series({ model: 't-jz-chain', size: [6, 4, 5], coupling: 0.4, parameters: line, prepare: 'pair-left' });
    expect(others).toEqual([]);
    expect(tJz?.at).toEqual({});
    expect(tJz?.rows.map(({ size, census }) => [size, census.sector_count])).toEqual([4, 5, 6].map((L) => [L, 2 ** (L + 1) - 1]));
    // Two spins on L sites.
    expect(tJz?.rows.map(({ sector_dimension }) => sector_dimension)).toEqual([6, 10, 15]);
    expect(tJz?.verdict.reason).toMatch(/too few sizes/);
  });

  it('takes one vanishing and one other coupling for all, and goes along other axes', () => {
    const dipole = series({
      model: 'dipole-spin-one-chain',
      size: { from: 4, to: 8, step: 1 },
      coupling: [0.5, 0, 1, 2],
      parameters: { geometry: ['line', 'ring'] },
      prepare: 'all-zero',
    });
    expect(dipole.map(({ at }) => at)).toEqual([
      { coupling: 0, geometry: 'line' },
      { coupling: 0, geometry: 'ring' },
      { coupling: 0.5, geometry: 'line' },
      { coupling: 0.5, geometry: 'ring' },
    ]);
    // Ergodicity breaking arising from Hilbert space fragmentation in dipole-conserving Hamiltonians, Phys. Rev. X 10, 011047 (2020),
    // 10.1103/PhysRevX.10.011047: the models; counts by enumeration.
    expect(dipole.map(({ rows }) => rows.map(({ census }) => census.sector_count))).toMatchObject([
      [57, 139, 337, 815, 1969],
      [38, 88, 207, 491, 1172],
      [49, 99, 193, 367, 689],
      {},
    ]);
  });

  it('within the conserved numbers of the state: dimension of that space', () => {
    const [xxz] = series({ model: 'xxz-chain', size: [4, 6, 8], coupling: 1, prepare: 'neel' }, 'conserved');
    expect(xxz?.rows.map(({ census }) => [census.dimension, census.sector_count])).toEqual([
      [6, 1],
      [20, 1],
      [70, 1],
    ]);
    expect(xxz?.verdict.fragmentation).toBe('none');
  });

  it('leaves out realisations of disorder', () => {
    const disorder = { strength: 1, realisations: 50, seed: 1 };
    expect(series({ model: 'xxz-chain', size: 4, coupling: [0.5, 1], prepare: 'neel', disorder })).toHaveLength(1);
  });

  it('refuses what has no product basis, and what does not fit', () => {
    expect(() => series({ model: 'random-matrix', size: 4, coupling: 1, prepare: 'first' })).toThrow(
      expect.objectContaining({ code: 'cli.usage', details: expect.objectContaining({ found: 'random-matrix' }) }),
    );
    expect(() => series({ model: 'xxz-chain', size: 10, coupling: 1, prepare: 'neel' }, 'whole', 4000)).toThrow(
      expect.objectContaining({ code: 'point.too-large' }),
    );
  });
});
