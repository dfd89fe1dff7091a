import { describe, expect, it } from 'vitest';
import { fragmentationOf } from '../../../src/analysis/fragmentation.js';
import { renderSvg } from '../../../src/report/render-figure.js';
import { type SectorsFigure, sectorsFigureSpec } from '../../../src/report/sectors-figure.js';
import { partitionSectors } from '../../../src/spectral/sectors.js';
import { DIPOLE_THREE, movingSpace, T_JZ } from '../../support/constrained-moves.js';

function seriesOf(label: string, moves: typeof T_JZ): SectorsFigure['series'][number] {
  const rows = [3, 4, 5, 6, 7, 8].map((size) => ({ size, census: partitionSectors(movingSpace(size, 3, moves)).census }));
  return { label, rows, fit: fragmentationOf(rows.map(({ size, census }) => ({ size, share: census.largest_sector_fraction }))).fit };
}

const figure = (series: SectorsFigure['series']): SectorsFigure => ({ series, sizeTitle: 'size L: sites', caption: 'Sectors of a chain.' });

describe('sectorsFigureSpec', () => {
  it('draws every share, every fit and the sizes at the largest system', async () => {
    const one = seriesOf('', T_JZ);
    const svg = await renderSvg(sectorsFigureSpec(figure([one])));
    const marks = (role: string): number => svg.split(`aria-roledescription="${role} mark"`).length - 1;
    const symbols = svg.match(/mark-symbol[\s\S]*?<\/g>/g)?.map((group) => group.split('<path').length - 1) ?? [];
    expect(symbols).toContain(one.rows.length);
    expect(symbols).toContain(one.rows.at(-1)?.census.sizes.length);
    expect(svg).toContain('Sectors at size 8');
    expect(svg).toContain('size L: sites');
    expect(svg).toContain('Sectors of a chain.');
    expect(svg).not.toMatch(/NaN|Infinity|undefined/);
    expect(marks('legend')).toBe(0);
  });

  it('names the series where there are several', async () => {
    const svg = await renderSvg(sectorsFigureSpec(figure([seriesOf('coupling 0', DIPOLE_THREE), seriesOf('coupling 0.5', T_JZ)])));
    expect(svg).toContain('coupling 0.5');
  });

  it('takes a single size without a fit', async () => {
    const rows = seriesOf('', T_JZ).rows.slice(0, 1);
    const svg = await renderSvg(sectorsFigureSpec(figure([{ label: '', rows, fit: null }])));
    expect(svg).toContain('Sectors at size 3');
    expect(svg).not.toMatch(/NaN|Infinity|undefined/);
  });
});
