/**
 * The figure of sectors as a Vega specification: the largest sector's share against size with its fit, and how many sectors have which
 * size at the largest system. Both on logarithmic scales. Pure; can be rendered headless or in a browser.
 */
import type { Axis, Data, GroupMark, Mark, Scale, Spec } from 'vega';
import { type FragmentationFit, fittedShare } from '../analysis/fragmentation.js';
import type { SectorCensus } from '../spectral/sectors.js';
import {
  captionMark,
  FIGURE_CONFIG,
  INK,
  layoutAxis,
  panelHeading,
  positionAxis,
  positionScale,
  textWidth,
  wrapText,
} from './figure-parts.js';

export interface SectorsFigure {
  readonly series: readonly {
    /** '' where there is a single one */
    readonly label: string;
    readonly rows: readonly { readonly size: number; readonly census: SectorCensus }[];
    readonly fit: FragmentationFit | null;
  }[];
  readonly sizeTitle: string;
  readonly caption: string;
}

const PANEL = { width: 300, height: 230, gap: 84 } as const;
const CAPTION_SIZE = 11;
const BELOW_AXIS = 56;
/** Distinguishable with the common forms of colour blindness. */
const COLOURS = ['#0072b2', '#d55e00', '#009e73', '#cc79a7', '#e69f00', '#56b4e9', '#222222'] as const;

/** A logarithmic domain with room on either side. */
function decades(values: readonly number[]): [number, number] {
  const low = Math.min(...values, Infinity);
  const high = Math.max(...values, -Infinity);
  return low > high ? [0.1, 1] : [low / 1.5, high * 1.5];
}

const logScale = (name: 'x' | 'y', domain: readonly [number, number]): Scale => ({
  name,
  type: 'log',
  domain: [...domain],
  range: name === 'x' ? 'width' : 'height',
  nice: false,
  zero: false,
});

const logAxis = (orient: 'left' | 'bottom', title: string): Axis => ({
  orient,
  scale: orient === 'left' ? 'y' : 'x',
  title,
  format: '~g',
  tickCount: 6,
  labelOverlap: 'parity',
  ...(orient === 'left' ? { grid: true, gridColor: '#ececec' } : {}),
});

const COLOUR = { scale: 'colour', field: 'label' } as const;
const AT = { x: { scale: 'x', field: 'x' }, y: { scale: 'y', field: 'y' } } as const;

const points = (data: string): Mark => ({
  type: 'symbol',
  from: { data },
  encode: { update: { ...AT, size: { value: 22 }, fill: COLOUR, stroke: COLOUR } },
});

const fits: Mark = {
  type: 'group',
  from: { facet: { name: 'one-fit', data: 'fit', groupby: 'label' } },
  marks: [{ type: 'line', from: { data: 'one-fit' }, encode: { update: { ...AT, stroke: COLOUR, strokeWidth: { value: 1.4 } } } }],
};

function panel(at: number, heading: string, scales: Scale[], axes: Axis[], marks: Mark[]): GroupMark {
  const update = {
    x: { value: at * (PANEL.width + PANEL.gap) },
    y: { value: 0 },
    width: { value: PANEL.width },
    height: { value: PANEL.height },
    stroke: { value: INK },
  };
  const signals = [
    { name: 'width', value: PANEL.width },
    { name: 'height', value: PANEL.height },
  ];
  return { type: 'group', encode: { update }, signals, scales, title: panelHeading([heading]), axes, marks };
}

function dataOf(series: SectorsFigure['series']): Data[] {
  const shares = series.flatMap(({ label, rows }) =>
    rows.map(({ size, census }) => ({ label, x: size, y: census.largest_sector_fraction })),
  );
  const fitted = series.flatMap(({ label, rows, fit }) =>
    fit === null ? [] : rows.map(({ size }) => ({ label, x: size, y: fittedShare(fit, size) })),
  );
  const distribution = series.flatMap(({ label, rows }) =>
    (rows.at(-1)?.census.sizes ?? []).map(({ size, sectors }) => ({ label, x: size, y: sectors })),
  );
  return [
    { name: 'share', values: shares },
    { name: 'fit', values: fitted },
    { name: 'distribution', values: distribution },
  ];
}

/** @returns a complete Vega specification */
export function sectorsFigureSpec({ series, sizeTitle, caption }: SectorsFigure): Spec {
  const sizes = [...new Set(series.flatMap(({ rows }) => rows.map(({ size }) => size)))].sort((a, b) => a - b);
  const shares = series.flatMap(({ rows }) => rows.map(({ census }) => census.largest_sector_fraction));
  const distributions = series.flatMap(({ rows }) => rows.at(-1)?.census.sizes ?? []);
  const labels = series.map(({ label }) => label);
  const layout = layoutAxis(sizes);
  const width = 2 * PANEL.width + PANEL.gap;
  const beside = labels.length > 1 ? Math.max(...labels.map((label) => textWidth(label, 11))) + 44 : 0;
  const lines = wrapText(caption, width, CAPTION_SIZE);
  const lineHeight = CAPTION_SIZE * 1.4;
  return {
    $schema: 'https://vega.github.io/schema/vega/v6.json',
    description: caption,
    width,
    height: PANEL.height,
    autosize: 'none',
    padding: { left: 74, top: 40, right: Math.max(beside + 18, 24), bottom: BELOW_AXIS + lines.length * lineHeight + 12 },
    config: FIGURE_CONFIG,
    data: dataOf(series),
    scales: [{ name: 'colour', type: 'ordinal', domain: labels, range: [...COLOURS] }],
    legends:
      labels.length > 1
        ? [
            {
              stroke: 'colour',
              type: 'symbol',
              symbolType: 'stroke',
              symbolStrokeWidth: 2.4,
              orient: 'none',
              legendX: width + 18,
              legendY: 0,
            },
          ]
        : [],
    marks: [
      panel(
        0,
        'Share of the largest sector; lines: fit',
        [positionScale('x', layout), logScale('y', decades(shares))],
        [positionAxis('x', layout, sizeTitle), logAxis('left', 'largest sector fraction')],
        [fits, points('share')],
      ),
      panel(
        1,
        `Sectors at size ${sizes.at(-1) ?? '–'}`,
        [
          logScale('x', decades(distributions.map(({ size }) => size))),
          logScale('y', decades(distributions.map(({ sectors }) => sectors))),
        ],
        [logAxis('bottom', 'configurations in a sector'), logAxis('left', 'number of sectors')],
        [points('distribution')],
      ),
      captionMark(lines, PANEL.height + BELOW_AXIS, CAPTION_SIZE, lineHeight),
    ],
  };
}
