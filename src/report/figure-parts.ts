/** Parts that every figure shares: axes laid out from grid values, text wrapping, fonts and colours. Pure; runs in a browser as well. */
import type { Axis, Mark, Scale, Title } from 'vega';
import { spacingOf } from '../analysis/spacing.js';
import { formatNumber } from './format.js';

export const FONT = 'DejaVu Sans';
export const INK = '#222222';
export const FAINT = '#8a8a8a';
/** Cells without a value. */
export const EMPTY_FILL = '#e4e4e4';

export const FIGURE_CONFIG = {
  background: 'white',
  axis: {
    labelFont: FONT,
    titleFont: FONT,
    labelFontSize: 11,
    titleFontSize: 12,
    titleFontWeight: 'normal',
    labelColor: INK,
    titleColor: INK,
    domainColor: INK,
    tickColor: INK,
    titlePadding: 8,
  },
  legend: {
    labelFont: FONT,
    titleFont: FONT,
    labelFontSize: 11,
    titleFontSize: 12,
    titleFontWeight: 'normal',
    labelColor: INK,
    titleColor: INK,
    titleLimit: 0,
    labelLimit: 0,
  },
  title: { font: FONT, fontSize: 12, color: INK, fontWeight: 'normal', limit: 0 },
} as const;

/**
 * Where the values of one axis lie on its scale. Cell i reaches from edges[i] to edges[i + 1], half-way to its neighbours on the scale;
 * words, and numbers that share an axis with words, stand at whole positions.
 */
export interface AxisLayout {
  readonly scale: 'linear' | 'log' | 'band';
  readonly values: readonly (number | string)[];
  readonly positions: readonly number[];
  readonly edges: readonly number[];
}

export function layoutAxis(values: readonly (number | string)[]): AxisLayout {
  const numeric = values.every((value) => typeof value === 'number');
  const positions = numeric ? values : values.map((_, index) => index);
  const scale = numeric ? spacingOf(positions) : 'band';
  const to = (x: number): number => (scale === 'log' ? Math.log(x) : x);
  const from = (x: number): number => (scale === 'log' ? Math.exp(x) : x);
  const at = positions.map(to);
  const first = at[0] ?? 0;
  const last = at.at(-1) ?? 0;
  const firstHalf = at.length > 1 ? (at[1] - first) / 2 : 0.5;
  const lastHalf = at.length > 1 ? (last - (at.at(-2) as number)) / 2 : 0.5;
  const inner = at.slice(1).map((x, index) => (x + at[index]) / 2);
  return { scale, values, positions, edges: [first - firstHalf, ...inner, last + lastHalf].map(from) };
}

export function positionScale(name: 'x' | 'y', layout: AxisLayout, domain: readonly [number, number] = ends(layout)): Scale {
  return {
    name,
    type: layout.scale === 'log' ? 'log' : 'linear',
    domain: [...domain],
    range: name === 'x' ? 'width' : 'height',
    nice: false,
    zero: false,
  };
}

function ends({ edges }: AxisLayout): [number, number] {
  return [edges[0], edges.at(-1) as number];
}

/** Ticks on the values themselves while there are few, so that no tick names a size that is not in the grid. */
export function positionAxis(name: 'x' | 'y', layout: AxisLayout, title: string | null): Axis {
  const shared = { orient: name === 'x' ? 'bottom' : 'left', scale: name, ...(title === null ? {} : { title }) } as const;
  const few = layout.values.length <= (name === 'x' ? 6 : 16);
  if (layout.scale === 'band' || few) {
    const names = layout.values.map((value) => (typeof value === 'number' ? formatNumber(value) : value));
    const places = JSON.stringify(layout.positions);
    const text = { signal: `${JSON.stringify(names)}[indexof(${places}, datum.value)]` };
    return { ...shared, values: [...layout.positions], labelOverlap: 'parity', encode: { labels: { update: { text } } } };
  }
  return { ...shared, tickCount: 7, labelOverlap: 'parity', ...(layout.scale === 'log' ? { format: '~g' } : {}) };
}

/** Mean advance of a character of the figure font, as a share of the font size; wide enough that wrapped lines never overrun. */
const ADVANCE = 0.56;

export function textWidth(text: string, fontSize: number): number {
  return Array.from(text).length * ADVANCE * fontSize;
}

/** Lines over a panel, flush with its left edge. */
export function panelHeading(lines: readonly string[]): Title {
  return { text: [...lines], anchor: 'start', frame: 'group', offset: 6 };
}

/** Room to the left of a y axis: its tick labels and its title. */
export function axisGutter(layout: AxisLayout): number {
  const widest = Math.max(...layout.values.map((value) => textWidth(typeof value === 'number' ? formatNumber(value) : value, 11)), 12);
  return Math.ceil(widest) + 36;
}

export function captionMark(lines: readonly string[], top: number, fontSize: number, lineHeight: number): Mark {
  return {
    type: 'text',
    encode: {
      update: {
        x: { value: 0 },
        y: { value: top },
        text: { value: [...lines] },
        lineHeight: { value: lineHeight },
        font: { value: FONT },
        fontSize: { value: fontSize },
        fill: { value: INK },
        baseline: { value: 'top' },
      },
    },
  };
}

/** Binds a number to the word or sign before it, so that a line never breaks between a parameter and its value. */
export function keepTogether(text: string): string {
  return text.replaceAll(' = ', '\u00a0=\u00a0').replace(/ (?=-?[\d.[])/g, '\u00a0');
}

/** Lines of at most `width` pixels, broken at spaces. */
export function wrapText(text: string, width: number, fontSize: number): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    const longer = line === '' ? word : `${line} ${word}`;
    if (line !== '' && textWidth(longer, fontSize) > width) {
      lines.push(line);
      line = word;
    } else line = longer;
  }
  return line === '' ? lines : [...lines, line];
}
