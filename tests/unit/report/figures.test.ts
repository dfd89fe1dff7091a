import { mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { boundaryOf } from '../../../src/analysis/boundary.js';
import { curvesOf } from '../../../src/analysis/curves.js';
import { phaseMapsOf } from '../../../src/analysis/phase-map.js';
import { findQuantity } from '../../../src/analysis/quantities.js';
import { samplesOf } from '../../../src/analysis/samples.js';
import { WindrowError } from '../../../src/core/errors.js';
import { findModel } from '../../../src/models/registry.js';
import { cutFigureSpec } from '../../../src/report/cut-figure.js';
import { questionTitles, sweepLabels } from '../../../src/report/labels.js';
import { pagesOf, PANEL_LIMIT, phaseDiagramSpec } from '../../../src/report/phase-diagram.js';
import { renderPng, renderSvg, writeFigure } from '../../../src/report/render-figure.js';
import type { CellRow } from '../../../src/store/types.js';
import { syntheticRows } from '../../support/synthetic-map.js';
import { range } from '../../support/two-level-rows.js';

const sizes = [4, 8, 12, 16];
const couplings = range(0.5, 4, 8);
const labels = sweepLabels(
  {
    name: 'junction',
    model: 'bose-hubbard-dimer',
    axes: [
      { name: 'size', values: sizes, unit: 'number of bosons' },
      { name: 'coupling', values: couplings, unit: 'Λ = U N/(2J)' },
    ],
  },
  findModel('bose-hubbard-dimer'),
);
const notes = ['Prepared and detected state: all-left.'];
const winding = findQuantity('winding_number');

function special(row: CellRow, size: number, coupling: number): CellRow {
  if (size === 16 && coupling > 3.8)
    return { ...row, point: null, fields: null, failure: { code: 'point.too-large', message: 'too large' } };
  if (size === 12 && coupling > 3.8) return { ...row, point: null, fields: null };
  if (size === 8 && coupling < 0.6 && row.fields) return { ...row, fields: { ...row.fields, flags: ['doubtful'] } };
  return row;
}

function diagram(rows: readonly CellRow[], panels?: number) {
  const maps = phaseMapsOf(samplesOf(rows, winding), { x: 'coupling', y: 'size' }).slice(0, panels);
  const boundaries = curvesOf(samplesOf(rows, findQuantity('winding_fraction')), 'coupling').map((curve) =>
    boundaryOf(curve, { kind: 'share', share: 0.5 }),
  );
  return phaseDiagramSpec({ maps, boundaries, quantity: winding, labels, boundaryText: 'half of the greatest winding fraction', notes });
}

/** Text contents of an SVG, entities resolved. */
function textsOf(svg: string): string[] {
  return [...svg.matchAll(/<(?:text|tspan)[^>]*>([^<]+)</g)].map(([, text]) =>
    text.replaceAll('&lt;', '<').replaceAll('&gt;', '>').replaceAll('&amp;', '&'),
  );
}

/** Tags in balance: enough to know that nothing broke the document. */
function expectWellFormed(svg: string): void {
  const open: string[] = [];
  for (const [, close, name, self] of svg.matchAll(/<(\/?)([a-zA-Z]+)[^>]*?(\/?)>/g)) {
    if (self === '/') continue;
    if (close === '/') expect(open.pop()).toBe(name);
    else open.push(name);
  }
  expect(open).toEqual([]);
}

let full = '';
beforeAll(async () => {
  full = await renderSvg(diagram(syntheticRows(sizes, couplings, special)));
});

describe('the phase diagram', () => {
  it('is a well-formed SVG with axis titles and units, colour bar, schedules, resolution and caption', () => {
    expectWellFormed(full);
    const text = textsOf(full).join(' ');
    for (const part of [
      'coupling: Λ = U N/(2J)',
      'size N: number of bosons',
      'winding',
      '(a) exponential, mean 0.25',
      '(b) fixed, interval 0.37',
      '(c) gamma, mean 0.5, shape 2.5,',
      'K = 2000, δ = 0.002, ε = 0.0005',
      'junction: winding number of bose-hubbard-dimer.',
      'Boundary: half of the greatest winding fraction.',
      'all-left',
    ])
      expect(text.replaceAll('\u00a0', ' ')).toContain(part);
    expect(full).toContain('linearGradient');
  });

  it('puts ticks on the sizes of the grid, and only there', () => {
    const groups = diagram(syntheticRows(sizes, couplings), 1).marks?.filter(({ type }) => type === 'group') as unknown as {
      axes: { orient: string; values?: number[] }[];
    }[];
    expect(groups[0]?.axes.find(({ orient }) => orient === 'left')?.values).toEqual(sizes);
    const numbers = textsOf(full).map((text) => text.trim());
    for (const size of sizes) expect(numbers.filter((text) => text === String(size)).length).toBeGreaterThanOrEqual(3);
  });

  it('explains the marks of doubtful, missing and failed cells in a key, only where there are some', async () => {
    const text = textsOf(full);
    for (const word of ['doubtful', 'not computed', 'failed', 'boundary: bracket and estimate']) expect(text).toContain(word);
    const clean = textsOf(await renderSvg(diagram(syntheticRows(sizes, couplings))));
    for (const word of ['doubtful', 'not computed', 'failed']) expect(clean).not.toContain(word);
  });

  it('gives every cell a mark of its own and fills only cells with a value from the palette', () => {
    const spec = diagram(syntheticRows(sizes, couplings, special), 1);
    const cells = spec.data?.find(({ name }) => name === 'cells0') as unknown as { values: { state: string; value: number | null }[] };
    expect(cells.values).toHaveLength(sizes.length * couplings.length);
    for (const { state, value } of cells.values) expect(value === null).toBe(state === 'missing' || state === 'failed');
  });

  it('draws the bracket of each boundary at its size', () => {
    const spec = diagram(syntheticRows(sizes, couplings), 1);
    const drawn = spec.data?.find(({ name }) => name === 'boundary0') as unknown as {
      values: { y: number; low: number; high: number; estimate: number }[];
    };
    expect(drawn.values.length).toBeGreaterThan(0);
    for (const { y, low, high, estimate } of drawn.values) {
      expect(sizes).toContain(y);
      expect(estimate).toBeGreaterThanOrEqual(low);
      expect(estimate).toBeLessThanOrEqual(high);
    }
  });

  it('covers an axis of one value, of words and of logarithmic spacing', async () => {
    const one = await renderSvg(diagram(syntheticRows([4], [1, 2, 3])));
    const log = await renderSvg(diagram(syntheticRows(sizes, [0.01, 0.1, 1, 10])));
    for (const svg of [one, log]) {
      expectWellFormed(svg);
      expect(svg).not.toMatch(/NaN|Infinity/);
    }
  });

  it('is split into pages when there are many panels', () => {
    const schedules = Array.from({ length: PANEL_LIMIT + 2 }, (_, index) => ({ family: 'fixed', interval: 0.1 * (index + 1) }));
    const maps = phaseMapsOf(samplesOf(syntheticRows([4], [1, 2], undefined, schedules), winding), { x: 'coupling', y: 'size' });
    expect(pagesOf(maps).map(({ length }) => length)).toEqual([PANEL_LIMIT, 2]);
  });

  it('draws a map without any value', async () => {
    const empty = syntheticRows(sizes, couplings, (row) => ({ ...row, point: null, fields: null }));
    const svg = await renderSvg(diagram(empty));
    expectWellFormed(svg);
    expect(textsOf(svg)).toContain('not computed');
  });
});

describe('the cut figure', () => {
  const rows = syntheticRows(sizes, couplings, special);

  it('has a line and a legend entry for each size, axis titles, and one panel a schedule', async () => {
    const curves = curvesOf(samplesOf(rows, winding), 'coupling');
    const svg = await renderSvg(cutFigureSpec({ curves, along: 'coupling', quantity: winding, labels, notes }));
    expectWellFormed(svg);
    const text = textsOf(svg);
    for (const size of sizes) expect(text).toContain(`size ${size}`);
    for (const part of ['coupling: Λ = U N/(2J)', 'winding number', 'doubtful']) expect(text).toContain(part);
    expect(text.filter((line) => /^\([abc]\) /.test(line))).toHaveLength(3);
  });

  it('puts questions into one panel where each has a single curve', async () => {
    const curves = curvesOf(samplesOf(rows, winding), 'coupling').filter(({ at }) => at['size'] === 8);
    const svg = await renderSvg(cutFigureSpec({ curves, along: 'coupling', quantity: winding, labels, notes }));
    const text = textsOf(svg).join(' ');
    expect(text).toContain('size 8');
    expect(text).toContain('exponential, mean 0.25; K = 2000');
    expect(text).not.toContain('(a) ');
  });

  it('has room for the error bars', () => {
    const curves = curvesOf(samplesOf(rows, winding), 'coupling')
      .slice(0, 1)
      .map((curve) => ({ ...curve, points: curve.points.map((point) => ({ ...point, value: 10, error: 2 })) }));
    const { scales } = cutFigureSpec({ curves, along: 'coupling', quantity: winding, labels, notes });
    const [low, high] = scales?.find(({ name }) => name === 'y')?.domain as [number, number];
    expect(low).toBeLessThan(8);
    expect(high).toBeGreaterThan(12);
  });
});

describe('titles of questions', () => {
  it('name what tells questions of one schedule apart, and nothing else', () => {
    const question = {
      schedule: { family: 'exponential', mean: 1 },
      resolution: { energy: 'auto', weight: 'auto' },
      budget: 200,
      detector: { efficiency: 1 },
      sampling: null,
    } as const;
    expect(questionTitles([question])).toEqual(['exponential, mean 1']);
    expect(questionTitles([question, { ...question, detector: { efficiency: 0.7 } }])).toEqual([
      'exponential, mean 1; efficiency 1',
      'exponential, mean 1; efficiency 0.7',
    ]);
    expect(new Set(questionTitles([question, { ...question, resolution: { energy: 0.1, weight: 'auto' } }])).size).toBe(2);
  });
});

describe('files', () => {
  let folder = '';
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), 'windrow-figures-'));
  });
  afterAll(() => rm(folder, { recursive: true, force: true }));

  it('are an SVG and a PNG of the same proportions, in a folder that is made', async () => {
    const spec = diagram(syntheticRows(sizes, couplings), 1);
    const paths = await writeFigure(spec, join(folder, 'new', 'figures'), 'map');
    expect(paths.map((path) => path.slice(folder.length))).toEqual(['/new/figures/map.svg', '/new/figures/map.png']);
    const [svg, png] = [await readFile(paths[0], 'utf8'), await readFile(paths[1])];
    // Signature and header chunk of Portable Network Graphics, ISO/IEC 15948:2004.
    expect([...png.subarray(0, 8)]).toEqual([137, 80, 78, 71, 13, 10, 26, 10]);
    expect(png.subarray(12, 16).toString('latin1')).toBe('IHDR');
    const [width, height] = [png.readUInt32BE(16), png.readUInt32BE(20)];
    const box = /viewBox="0 0 ([\d.]+) ([\d.]+)"/.exec(svg);
    expect(width).toBeGreaterThan(800);
    expect(Math.abs(width / height - Number(box?.[1]) / Number(box?.[2]))).toBeLessThan(0.01);
  });

  it('hold text in the PNG without any font of the machine', async () => {
    const words =
      '<svg xmlns="http://www.w3.org/2000/svg" width="60" height="20"><text x="2" y="15" font-family="DejaVu Sans">Λ</text></svg>';
    const blank = words.replace('Λ', '');
    expect(renderPng(words, 1).length).toBeGreaterThan(renderPng(blank, 1).length);
    await expect(readFile(join(folder, 'nothing'))).rejects.toThrow();
  });

  it('that cannot be written are refused with the folder', async () => {
    const blocked = join(folder, 'a-file');
    await writeFile(blocked, 'not a folder');
    const spec = diagram(syntheticRows([4], [1, 2]));
    const error = await writeFigure(spec, join(blocked, 'figures'), 'map').catch((thrown: unknown) => thrown);
    expect(error).toBeInstanceOf(WindrowError);
    expect(error).toMatchObject({ code: 'report.unwritable', details: { where: join(blocked, 'figures') } });
  });
});
