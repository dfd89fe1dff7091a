import { describe, expect, it } from 'vitest';
import { boundaryOf } from '../../../src/analysis/boundary.js';
import { curvesOf } from '../../../src/analysis/curves.js';
import { phaseMapsOf, type PhaseMap } from '../../../src/analysis/phase-map.js';
import { findQuantity } from '../../../src/analysis/quantities.js';
import { samplesOf } from '../../../src/analysis/samples.js';
import { colourDepth, type Paint, painter } from '../../../src/report/terminal-colour.js';
import { renderTerminalMap, type TerminalMapOptions } from '../../../src/report/terminal-map.js';
import type { CellRow } from '../../../src/store/types.js';
import { cellRow, range } from '../../support/two-level-rows.js';

/** Winding number 10 − coupling·size, so that every cell is known by head. */
const rows: CellRow[] = [2, 4].flatMap((size) =>
  [0, 0.5, 1, 1.5, 2].map((coupling): CellRow => {
    const cell = { winding_number: 10 - coupling * size, recurrent_weight: coupling * size };
    if (size === 4 && coupling === 2) return cellRow({ size, coupling, state: 'failed' });
    if (size === 4 && coupling === 1.5) return cellRow({ size, coupling, state: 'missing' });
    return cellRow({ size, coupling, cell, flags: size === 2 && coupling === 0 ? ['doubtful'] : [] });
  }),
);

const plain: Paint = (text) => text;
const base: TerminalMapOptions = {
  width: 60,
  colour: 'none',
  paint: plain,
  title: 'winding number · fixed',
  subtitle: 'K = 20',
  xTitle: 'coupling g',
  yTitle: 'size N',
  boundaries: [],
};

function mapOf(list: readonly CellRow[]): PhaseMap {
  return phaseMapsOf(samplesOf(list, findQuantity('winding_number')), { x: 'coupling', y: 'size' })[0];
}

describe('the terminal map', () => {
  it('is a picture in plain characters: largest size on top, digits as tenths of the range, its own sign for every other state', () => {
    const boundaries = curvesOf(samplesOf(rows, findQuantity('recurrent_weight')), 'coupling').map((curve) =>
      boundaryOf(curve, { kind: 'level', level: 1.5 }),
    );
    expect(renderTerminalMap(mapOf(rows), { ...base, boundaries })).toBe(
      [
        'winding number · fixed',
        'K = 20',
        'size N',
        '  4 |9 |5  0  ?  x  ',
        '  2 |9~ 7 |5  2  0  ',
        '     0  0.5   1.5',
        '     coupling g',
        '     0 = 6 … 9 = 10   | boundary   ~ doubtful   ? not computed   x failed',
      ].join('\n'),
    );
  });

  it('shows every k-th column where the terminal is too narrow, and says so', () => {
    const wide = range(0, 99, 100).map((coupling) => cellRow({ coupling, cell: { winding_number: coupling } }));
    const text = renderTerminalMap(mapOf(wide), { ...base, width: 40 });
    const [row] = text.split('\n').filter((line) => line.includes('|')) as [string];
    expect(row.length).toBeLessThanOrEqual(40);
    expect(text).toContain('every 3. column shown');
  });

  it('keeps lines within the width for any grid that fits', () => {
    for (const width of [40, 60, 80, 120]) {
      const list = range(0, 6, 30).map((coupling) => cellRow({ coupling, size: 60 }));
      const lines = renderTerminalMap(mapOf(list), { ...base, width, title: '', subtitle: '' }).split('\n');
      for (const line of lines.slice(1, 3)) expect(line.length).toBeLessThanOrEqual(width);
    }
  });

  it('paints blocks in colour, on the same grid', () => {
    const shares: (number | null)[] = [];
    const paint: Paint = (text, share) => {
      shares.push(share);
      return text;
    };
    renderTerminalMap(mapOf(rows), { ...base, colour: 'truecolor', paint });
    const row = shares.slice(0, 5);
    expect(row).toEqual([1, 0.875, 0.75, 0.625, 0.5].map((value) => expect.closeTo((value * 8 - 4) / 4, 12) as number));
    expect(shares.slice(5, 10).filter((share) => share === null)).toHaveLength(2);
  });
});

describe('colour', () => {
  it('is off for files, with NO_COLOR and on a dumb terminal', () => {
    expect(colourDepth(false, {})).toBe('none');
    expect(colourDepth(true, { NO_COLOR: '1' })).toBe('none');
    expect(colourDepth(true, { TERM: 'dumb' })).toBe('none');
    expect(colourDepth(true, { NO_COLOR: '', TERM: 'xterm' })).toBe('256');
    expect(colourDepth(true, { COLORTERM: 'truecolor' })).toBe('truecolor');
  });

  it('writes the palette with ink that stands out, and the nearest of the 256 colours', () => {
    const paint = painter((share) => (share < 0.5 ? 'rgb(0, 0, 95)' : 'rgb(255, 255, 0)'));
    expect(paint('x', 0, 'truecolor')).toBe('\x1b[48;2;0;0;95;38;5;231mx\x1b[0m');
    expect(paint('x', 1, 'truecolor')).toBe('\x1b[48;2;255;255;0;38;5;16mx\x1b[0m');
    // The cube's levels are 0, 95, 135, …, 255 at 16 + 36 r + 6 g + b (common practice of xterm).
    expect(paint('x', 0, '256')).toBe('\x1b[48;5;17;38;5;231mx\x1b[0m');
    expect(paint('x', 1, '256')).toBe('\x1b[48;5;226;38;5;16mx\x1b[0m');
    expect(paint('x', 1, 'none')).toBe('x');
  });
});
