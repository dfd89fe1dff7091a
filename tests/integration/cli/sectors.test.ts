/** `windrow sectors` and exact counts at the built command line; neither needs a store. */
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { makeWorkplace, type Workplace } from './small-store.js';

const CHAIN = `
name: holes
model: t-jz-chain
size: { from: 3, to: 8, step: 1 }
coupling: 0.5
parameters: { geometry: line }
prepare: pair-left
schedules: [{ family: exponential, mean: 1 }]
budget: 10
`;

let place: Workplace;
let file: string;
beforeAll(() => {
  place = makeWorkplace();
  file = place.write('holes.yaml', CHAIN);
});
afterAll(() => place.remove());

describe('windrow sectors', () => {
  it('prints a table with the verdict, and writes the figure', async () => {
    const figures = join(place.folder, 'figures');
    const { status, out, err } = await place.run('sectors', file, '--scope', 'whole', '--figures', figures);
    expect(status).toBe(0);
    expect(err).toMatch(/wrote .*sectors-holes\.svg/);
    // 2^(L+1) − 1 sectors: Phys. Rev. B 101, 125126 (2020), 10.1103/PhysRevB.101.125126
    expect(out).toMatch(/^ *8 +6.561 +511 +70 /m);
    expect(out).toMatch(/^Fragmentation: strong – .*exponent/m);
    expect(existsSync(join(figures, 'sectors-holes.png'))).toBe(true);
  });

  it('prints JSON and CSV', async () => {
    const json = JSON.parse((await place.run('sectors', file, '--format', 'json')).out) as {
      scope: string;
      series: { sizes: { size: number; sector_count: number; sector_dimension: number; distribution: unknown[] }[] }[];
    };
    expect(json.scope).toBe('conserved');
    // One up and one down spin: two orders, C(L, 2) places.
    expect(json.series[0]?.sizes.at(-1)).toMatchObject({
      size: 8,
      sector_count: 2,
      sector_dimension: 28,
      distribution: [{ size: 28, sectors: 2 }],
    });
    const csv = (await place.run('sectors', file, '--format', 'csv', '--scope', 'whole')).out.trim().split('\n');
    expect(csv[0]).toMatch(/^size,dimension,sector_count,largest_sector,largest_sector_fraction,frozen_states,sector_dimension,/);
    expect(csv).toHaveLength(7);
  });

  it('refuses a model without a product basis', async () => {
    const other = place.write(
      'random.yaml',
      CHAIN.replace('t-jz-chain', 'random-matrix')
        .replace(/parameters.*\n/, '')
        .replace('pair-left', 'first'),
    );
    const { status, out, err } = await place.run('sectors', other, '--format', 'json');
    expect({ status, out }).toEqual({ status: 2, out: '' });
    expect((JSON.parse(err) as { error: { code: string } }).error.code).toBe('cli.usage');
  });
});

describe('windrow point --certify', () => {
  it('counts exactly', async () => {
    const { status, out } = await place.run('point', file, '--set', 'size=6', '--certify', '--format', 'json');
    expect(status).toBe(0);
    expect(JSON.parse(out.split('\n')[0] ?? '')).toMatchObject({ accessible_by: 'modular', sector_dimension: 15 });
  });
});
