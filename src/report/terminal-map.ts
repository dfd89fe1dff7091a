/**
 * The phase map of a terminal: sizes upwards, couplings to the right, one block of characters a cell.
 *
 * With colour, a cell is a block in the palette of the figures; without, a digit from 0 to 9 of the range (so that output to a file or
 * with NO_COLOR set says the same). Cells that are not plain values have their own signs in both: `~` doubtful, `?` not computed,
 * `x` failed, `-` no value. `|` stands right of the coupling at which a boundary's bracket begins.
 */
import type { Boundary } from '../analysis/boundary.js';
import type { CurvePoint } from '../analysis/curves.js';
import { boundariesOn, type PhaseMap, valueRange } from '../analysis/phase-map.js';
import { formatNumber } from './format.js';
import type { ColourDepth, Paint } from './terminal-colour.js';

export interface TerminalMapOptions {
  /** Columns of the terminal. */
  readonly width: number;
  readonly colour: ColourDepth;
  readonly paint: Paint;
  readonly title: string;
  readonly subtitle: string;
  readonly xTitle: string;
  readonly yTitle: string;
  readonly boundaries: readonly Boundary[];
  /** Limits of the colour scale; those of this map when absent. */
  readonly range?: readonly [number, number];
}

const WIDEST_CELL = 3;
const SIGNS: Readonly<Record<CurvePoint['state'], string>> = {
  value: '',
  doubtful: '~',
  'undefined-value': '-',
  failed: 'x',
  missing: '?',
};
const MEANINGS: Readonly<Record<CurvePoint['state'], string>> = {
  value: '',
  doubtful: 'doubtful',
  'undefined-value': 'no value',
  failed: 'failed',
  missing: 'not computed',
};

/** The share of the range, 0 to 1. */
function share(value: number, [low, high]: readonly [number, number]): number {
  return high === low ? 1 : Math.min(1, Math.max(0, (value - low) / (high - low)));
}

const digit = (part: number): string => String(Math.min(9, Math.floor(part * 10)));

/** Columns that are shown: all while they fit, otherwise every k-th. */
function shownColumns(count: number, room: number): { readonly step: number; readonly cell: number; readonly columns: number[] } {
  const step = Math.max(1, Math.ceil(count / Math.max(1, room)));
  const columns = Array.from({ length: Math.ceil(count / step) }, (_, index) => index * step);
  return { step, columns, cell: Math.max(1, Math.min(WIDEST_CELL, Math.floor(room / columns.length))) };
}

/** The column left of the boundary, so that it lies in this one or between this and the next. */
function boundaryColumn(map: PhaseMap, row: number, columns: readonly number[], found: ReadonlyMap<number | string, Boundary>): number {
  const bracket = found.get(map.y.values[row])?.bracket;
  if (!bracket) return -1;
  return columns.findLastIndex((column) => (map.x.values[column] as number) <= bracket.low);
}

function cellText(point: CurvePoint, mark: boolean, cell: number, range: readonly [number, number], options: TerminalMapOptions): string {
  const { colour, paint } = options;
  const line = colour === 'none' ? '|' : '│';
  if (point.state !== 'value' || point.value === null) {
    const part = point.value === null ? null : share(point.value, range);
    // A doubtful cell has a value; where there is room, it is shown beside the sign.
    const known = colour === 'none' && part !== null && cell > 1 && !mark ? digit(part) : '';
    const rest = mark && cell > 1 ? SIGNS[point.state].padEnd(cell - 1) + line : SIGNS[point.state].padEnd(cell - known.length);
    const sign = known + rest;
    return colour === 'none' ? sign : paint(sign, part, colour);
  }
  const part = share(point.value, range);
  if (colour === 'none') return mark ? (cell > 1 ? digit(part).padEnd(cell - 1) : '') + line : digit(part).padEnd(cell);
  return paint(mark ? line.padStart(cell) : ' '.repeat(cell), part, colour);
}

/** Ticks of the x axis: as many values as fit without touching. */
function tickLine(map: PhaseMap, columns: readonly number[], cell: number): string {
  let line = '';
  columns.forEach((column, index) => {
    const label = formatNumber(map.x.values[column] as number, 3);
    const at = index * cell;
    if (at < line.length + (line === '' ? 0 : 2)) return;
    // A label may not run past the last cell by more than itself.
    line = line.padEnd(at) + label;
  });
  return line;
}

function scaleLine(range: readonly [number, number], { colour, paint }: TerminalMapOptions): string {
  const [low, high] = range.map((value) => formatNumber(value, 3));
  if (colour === 'none') return `0 = ${low} … 9 = ${high}`;
  const bar = Array.from({ length: 24 }, (_, index) => paint(' ', index / 23, colour)).join('');
  return `${low} ${bar} ${high}`;
}

/** @returns lines joined by newlines, without a trailing one */
export function renderTerminalMap(map: PhaseMap, options: TerminalMapOptions): string {
  const range = options.range ?? valueRange([map]) ?? [0, 1];
  const names = map.y.values.map((value) => (typeof value === 'number' ? formatNumber(value) : value));
  const gutter = Math.max(...names.map(({ length }) => length), 3);
  const { step, cell, columns } = shownColumns(map.x.values.length, options.width - gutter - 3);
  const found = boundariesOn(map, options.boundaries);
  const frame = options.colour === 'none' ? '|' : '▏';
  const rows = map.cells.map((row, index) => {
    const mark = boundaryColumn(map, index, columns, found);
    const text = columns.map((column, place) => cellText(row[column], place === mark, cell, range, options)).join('');
    return `${names[index].padStart(gutter)} ${frame}${text}`;
  });
  const states = new Set(map.cells.flatMap((row) => row.map(({ state }) => state)));
  const legend = [
    scaleLine(range, options),
    ...([...found.values()].some(({ bracket }) => bracket) ? [`${options.colour === 'none' ? '|' : '│'} boundary`] : []),
    ...(['doubtful', 'missing', 'failed', 'undefined-value'] as const)
      .filter((state) => states.has(state))
      .map((state) => `${SIGNS[state]} ${MEANINGS[state]}`),
    ...(step > 1 ? [`every ${step}. column shown`] : []),
  ];
  const indent = ' '.repeat(gutter + 2);
  return [
    options.title,
    ...(options.subtitle === '' ? [] : [options.subtitle]),
    options.yTitle,
    ...rows.reverse(),
    indent + tickLine(map, columns, cell),
    indent + options.xTitle,
    indent + legend.join('   '),
  ].join('\n');
}
