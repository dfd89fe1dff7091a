/**
 * The phase diagram figure: a quantity over two axes as a Vega specification, one panel for each map, the boundary drawn in.
 *
 * All panels share one colour scale (a perceptually uniform palette; logarithmic where a positive quantity spans more than three
 * decades). Cells that are missing, failed, doubtful or without a value are marked, each in its own way, and explained in the key.
 * Pure: the specification can be rendered headless (render-figure.ts) or in a browser.
 */
import type { Data, GroupMark, Mark, Spec } from 'vega';
import type { Boundary } from '../analysis/boundary.js';
import type { CurvePoint } from '../analysis/curves.js';
import { boundariesOn, type PhaseMap, valueRange } from '../analysis/phase-map.js';
import type { Quantity } from '../analysis/quantities.js';
import {
  type AxisLayout,
  axisGutter,
  captionMark,
  EMPTY_FILL,
  FIGURE_CONFIG,
  INK,
  keepTogether,
  layoutAxis,
  panelHeading,
  positionAxis,
  positionScale,
  wrapText,
} from './figure-parts.js';
import { keyMarks, type KeyEntry } from './figure-key.js';
import { panelTitle, quantityTitle, resolutionText, type SweepLabels, unitSentences } from './labels.js';

export interface PhaseDiagram {
  /** At most PANEL_LIMIT; see `pagesOf`. */
  readonly maps: readonly PhaseMap[];
  readonly boundaries: readonly Boundary[];
  readonly quantity: Pick<Quantity, 'name' | 'unit' | 'integer'>;
  readonly labels: SweepLabels;
  /** How the boundary was found, for the caption; for example 'steepest change of the winding fraction'. */
  readonly boundaryText: string;
  /** Further sentences of the caption, such as the states. */
  readonly notes: readonly string[];
}

/** Panels in one figure; more become further pages. */
export const PANEL_LIMIT = 9;
const COLUMNS = 3;
const PANEL = { width: 250, height: 230, gapX: 64, gapY: 84 } as const;
const CAPTION_SIZE = 11;
/** Below the lowest panel: ticks, labels and the axis title. */
const BELOW_AXIS = 58;
const COLOUR_BAR = 118;

/** Splits maps into figures of at most PANEL_LIMIT panels. */
export function pagesOf(maps: readonly PhaseMap[]): PhaseMap[][] {
  const pages: PhaseMap[][] = [];
  for (let start = 0; start < maps.length; start += PANEL_LIMIT) pages.push(maps.slice(start, start + PANEL_LIMIT));
  return pages;
}

interface Layouts {
  readonly x: AxisLayout;
  readonly y: AxisLayout;
}

function cellData(map: PhaseMap, { x, y }: Layouts): object[] {
  return map.cells.flatMap((row, r) =>
    row.map(({ state, value }, c) => ({ x0: x.edges[c], x1: x.edges[c + 1], y0: y.edges[r], y1: y.edges[r + 1], state, value })),
  );
}

function boundaryData(map: PhaseMap, boundaries: readonly Boundary[], { y }: Layouts): object[] {
  const found = boundariesOn(map, boundaries);
  return map.y.values.flatMap((value, row) => {
    const bracket = found.get(value)?.bracket;
    return bracket ? [{ y: y.positions[row], low: bracket.low, high: bracket.high, estimate: bracket.estimate }] : [];
  });
}

const scaled = (scale: string, field: string) => ({ scale, field });

function rule(from: string, filter: readonly [string, string, string, string], stroke: string, width: number): Mark {
  const [x, x2, y, y2] = filter;
  return {
    type: 'rule',
    from: { data: from },
    encode: {
      update: {
        x: scaled('x', x),
        x2: scaled('x', x2),
        y: scaled('y', y),
        y2: scaled('y', y2),
        stroke: { value: stroke },
        strokeWidth: { value: width },
        strokeCap: { value: 'round' },
      },
    },
  };
}

function cellMarks(panel: number): Mark[] {
  const box = { x: scaled('x', 'x0'), x2: scaled('x', 'x1'), y: scaled('y', 'y0'), y2: scaled('y', 'y1') };
  const centre = {
    x: { signal: "(scale('x', datum.x0) + scale('x', datum.x1)) / 2" },
    y: { signal: "(scale('y', datum.y0) + scale('y', datum.y1)) / 2" },
  };
  const side = "min(abs(scale('x', datum.x1) - scale('x', datum.x0)), abs(scale('y', datum.y1) - scale('y', datum.y0)))";
  return [
    {
      type: 'rect',
      from: { data: `cells${panel}` },
      encode: {
        update: {
          ...box,
          // A stroke of the fill's colour closes the hairlines that rasterisers leave between neighbours.
          fill: [{ test: 'datum.value === null', value: EMPTY_FILL }, scaled('colour', 'value')],
          stroke: [{ test: 'datum.value === null', value: EMPTY_FILL }, scaled('colour', 'value')],
          strokeWidth: { value: 0.4 },
        },
      },
    },
    rule(`missing${panel}`, ['x0', 'x1', 'y0', 'y1'], '#9a9a9a', 1),
    rule(`failed${panel}`, ['x0', 'x1', 'y0', 'y1'], '#b3261e', 1.2),
    rule(`failed${panel}`, ['x0', 'x1', 'y1', 'y0'], '#b3261e', 1.2),
    {
      type: 'symbol',
      from: { data: `doubtful${panel}` },
      encode: {
        update: {
          ...centre,
          shape: { value: 'circle' },
          size: { signal: `max(6, 0.25 * pow(${side}, 2))` },
          fill: { value: 'white' },
          stroke: { value: INK },
          strokeWidth: { value: 1 },
        },
      },
    },
  ];
}

function boundaryMarks(panel: number): Mark[] {
  const line = (stroke: string, width: number): Mark => ({
    type: 'line',
    from: { data: `boundary${panel}` },
    encode: {
      update: { x: scaled('x', 'estimate'), y: scaled('y', 'y'), stroke: { value: stroke }, strokeWidth: { value: width } },
    },
  });
  const bracket = ['low', 'high', 'y', 'y'] as const;
  return [
    line('white', 3.2),
    rule(`boundary${panel}`, bracket, 'white', 4.4),
    line(INK, 1.4),
    rule(`boundary${panel}`, bracket, INK, 2),
    {
      type: 'symbol',
      from: { data: `boundary${panel}` },
      encode: {
        update: {
          x: scaled('x', 'estimate'),
          y: scaled('y', 'y'),
          size: { value: 30 },
          fill: { value: 'white' },
          stroke: { value: INK },
          strokeWidth: { value: 1.3 },
        },
      },
    },
  ];
}

function panelData(figure: PhaseDiagram, map: PhaseMap, panel: number, layouts: Layouts): Data[] {
  const state = (name: string, states: string): Data => ({
    name: `${name}${panel}`,
    source: `cells${panel}`,
    transform: [{ type: 'filter', expr: `datum.state === '${states}'` }],
  });
  return [
    { name: `cells${panel}`, values: cellData(map, layouts) },
    state('missing', 'missing'),
    state('failed', 'failed'),
    state('doubtful', 'doubtful'),
    { name: `boundary${panel}`, values: boundaryData(map, figure.boundaries, layouts) },
  ];
}

/** Drawn over the cells, which would cover half of the group's own stroke. */
const FRAME: Mark = {
  type: 'rect',
  encode: {
    update: {
      x: { value: 0 },
      y: { value: 0 },
      width: { value: PANEL.width },
      height: { value: PANEL.height },
      fill: { value: null },
      stroke: { value: INK },
    },
  },
};

function panelHead(figure: PhaseDiagram, map: PhaseMap, panel: number): string[] {
  const letter = figure.maps.length > 1 ? `(${String.fromCharCode(97 + panel)}) ` : '';
  return [
    ...wrapText(keepTogether(letter + panelTitle(map.question, map.at)), PANEL.width + PANEL.gapX / 2, 12),
    resolutionText(map.question, map.resolution),
  ];
}

function panelMark(figure: PhaseDiagram, map: PhaseMap, panel: number, columns: number, layouts: Layouts): GroupMark {
  const column = panel % columns;
  const row = Math.floor(panel / columns);
  const lowest = panel + columns >= figure.maps.length;
  return {
    type: 'group',
    encode: {
      update: {
        x: { value: column * (PANEL.width + PANEL.gapX) },
        y: { value: row * (PANEL.height + PANEL.gapY) },
        width: { value: PANEL.width },
        height: { value: PANEL.height },
      },
    },
    signals: [
      { name: 'width', value: PANEL.width },
      { name: 'height', value: PANEL.height },
    ],
    scales: [positionScale('x', layouts.x), positionScale('y', layouts.y)],
    title: panelHeading(panelHead(figure, map, panel)),
    axes: [
      positionAxis('x', layouts.x, lowest ? figure.labels.axisTitle(map.x.axis) : null),
      positionAxis('y', layouts.y, column === 0 ? figure.labels.axisTitle(map.y.axis) : null),
    ],
    marks: [...cellMarks(panel), FRAME, ...boundaryMarks(panel)],
  };
}

function keyOf(maps: readonly PhaseMap[], drawn: boolean): KeyEntry[] {
  const states = new Set<CurvePoint['state']>(maps.flatMap(({ cells }) => cells.flatMap((row) => row.map(({ state }) => state))));
  return [
    ...(drawn ? [{ kind: 'boundary', text: 'boundary: bracket and estimate' } as const] : []),
    ...(states.has('doubtful') ? [{ kind: 'doubtful', text: 'doubtful' } as const] : []),
    ...(states.has('missing') ? [{ kind: 'missing', text: 'not computed' } as const] : []),
    ...(states.has('failed') ? [{ kind: 'failed', text: 'failed' } as const] : []),
    ...(states.has('undefined-value') ? [{ kind: 'undefined', text: 'no value' } as const] : []),
  ];
}

/** @returns a complete Vega specification; its size follows from the number of panels */
export function phaseDiagramSpec(figure: PhaseDiagram): Spec {
  const { maps, quantity, labels } = figure;
  const columns = Math.min(COLUMNS, Math.max(1, maps.length));
  const rows = Math.ceil(maps.length / columns);
  const width = columns * PANEL.width + (columns - 1) * PANEL.gapX;
  const height = rows * PANEL.height + (rows - 1) * PANEL.gapY;
  const layouts = maps.map((map) => ({ x: layoutAxis(map.x.values), y: layoutAxis(map.y.values) }));
  const drawn = maps.some((map, panel) => boundaryData(map, figure.boundaries, layouts[panel]).length > 0);
  const [low, high] = valueRange(maps) ?? [0, 1];
  const logarithmic = low > 0 && high / low > 1e3;
  const heads = Math.max(...maps.map((map, panel) => panelHead(figure, map, panel).length), 1);
  const gutter = Math.max(...layouts.map(({ y }) => axisGutter(y)), 30);
  const key = keyMarks(keyOf(maps, drawn), 0, height + BELOW_AXIS, width + COLOUR_BAR);
  const captionTop = height + BELOW_AXIS + key.height;
  const sentences = [
    `${labels.sweep}: ${quantity.name.replaceAll('_', ' ')} of ${labels.model}.`,
    ...(drawn ? [`Boundary: ${figure.boundaryText}.`] : []),
    ...figure.notes,
    ...unitSentences(labels),
  ];
  const caption = wrapText(keepTogether(sentences.join(' ')), width + COLOUR_BAR, CAPTION_SIZE);
  const lineHeight = CAPTION_SIZE * 1.4;
  return {
    $schema: 'https://vega.github.io/schema/vega/v6.json',
    description: `${quantity.name} over ${maps[0]?.x.axis ?? 'x'} and ${maps[0]?.y.axis ?? 'y'} in the sweep ${labels.sweep}`,
    width,
    height,
    // Every extent is known here; measured ones depend on whether a canvas is at hand.
    autosize: 'none',
    padding: {
      left: gutter + 16,
      top: heads * 15 + 22,
      right: COLOUR_BAR + 8,
      bottom: captionTop - height + caption.length * lineHeight + 12,
    },
    config: FIGURE_CONFIG,
    data: maps.flatMap((map, panel) => panelData(figure, map, panel, layouts[panel] as Layouts)),
    scales: [
      {
        name: 'colour',
        type: logarithmic ? 'log' : 'linear',
        domain: low === high ? [low - 0.5, high + 0.5] : [low, high],
        range: { scheme: 'viridis' },
        zero: false,
        clamp: true,
      },
    ],
    legends: [
      {
        fill: 'colour',
        type: 'gradient',
        orient: 'none',
        legendX: width + 22,
        legendY: 0,
        title: wrapText(quantityTitle(quantity), COLOUR_BAR - 26, 12),
        gradientLength: PANEL.height - 50,
        gradientThickness: 14,
        tickCount: 6,
        // 'g' would write 60 as 6e+1 where steps are tens.
        format: quantity.integer && high - low >= 6 ? 'd' : logarithmic || high >= 1e7 ? '~g' : '~r',
      },
    ],
    marks: [
      ...maps.map((map, panel) => panelMark(figure, map, panel, columns, layouts[panel] as Layouts)),
      ...key.marks,
      captionMark(caption, captionTop, CAPTION_SIZE, lineHeight),
    ],
  };
}
