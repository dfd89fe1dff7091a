/**
 * The cut figure: a quantity along one axis as a Vega specification, one line for each curve.
 *
 * Curves of one question share a panel; where every question has a single curve, all share one panel and the lines are the questions.
 * Lines break where a value is missing; doubtful points are hollow; averaged points carry a bar of one standard error on either side.
 * Pure: the specification can be rendered headless (render-figure.ts) or in a browser.
 */
import type { Data, GroupMark, Mark, Spec } from 'vega';
import { type Curve, groupBy } from '../analysis/curves.js';
import type { Coordinates } from '../analysis/samples.js';
import type { Quantity } from '../analysis/quantities.js';
import {
  type AxisLayout,
  captionMark,
  FIGURE_CONFIG,
  INK,
  keepTogether,
  layoutAxis,
  panelHeading,
  positionAxis,
  positionScale,
  textWidth,
  wrapText,
} from './figure-parts.js';
import { keyMarks } from './figure-key.js';
import { coordinatesText, scheduleText } from './format.js';
import { panelTitle, quantityTitle, resolutionText, type SweepLabels, unitSentences } from './labels.js';

export interface CutFigure {
  readonly curves: readonly Curve[];
  /** The axis of the curves. */
  readonly along: string;
  readonly quantity: Pick<Quantity, 'name' | 'unit' | 'integer'>;
  readonly labels: SweepLabels;
  readonly notes: readonly string[];
}

interface Panel {
  readonly head: readonly string[];
  readonly lines: readonly { readonly label: string; readonly curve: Curve }[];
}

const COLUMNS = 3;
const PANEL = { width: 300, height: 230, gapX: 70, gapY: 90 } as const;
const CAPTION_SIZE = 11;
const BELOW_AXIS = 58;
const LEGEND_ROWS = 16;
/** Distinguishable with the common forms of colour blindness; more lines than these take the sequential palette. */
const COLOURS = ['#0072b2', '#d55e00', '#009e73', '#cc79a7', '#e69f00', '#56b4e9', '#222222'] as const;

/** The coordinates that tell curves apart. */
function varying(curves: readonly Curve[]): string[] {
  const axes = Object.keys(curves[0]?.at ?? {});
  return axes.filter((axis) => new Set(curves.map(({ at }) => at[axis])).size > 1);
}

function pick(at: Coordinates, axes: readonly string[], inside: boolean): Coordinates {
  return Object.fromEntries(Object.entries(at).filter(([axis]) => axes.includes(axis) === inside));
}

function panelsOf(curves: readonly Curve[]): Panel[] {
  const free = varying(curves);
  const questions = [...groupBy(curves, ({ questionOrdinal }) => String(questionOrdinal)).values()];
  const common = coordinatesText(pick(curves[0]?.at ?? {}, free, false));
  if (questions.length > 1 && questions.every((list) => list.length === 1)) {
    const lines = questions.flat().map((curve) => ({
      curve,
      label: `${scheduleText(curve.question.schedule)}; ${resolutionText(curve.question, curve.resolution)}`,
    }));
    return [{ head: common === '' ? [] : [common], lines }];
  }
  return questions.map((list, index) => {
    const [first] = list as [Curve, ...Curve[]];
    const letter = questions.length > 1 ? `(${String.fromCharCode(97 + (index % 26))}) ` : '';
    return {
      head: [
        ...wrapText(keepTogether(letter + panelTitle(first.question, pick(first.at, free, false))), PANEL.width + 20, 12),
        resolutionText(first.question, first.resolution),
      ],
      lines: list.map((curve) => ({ curve, label: coordinatesText(pick(curve.at, free, true)) || 'value' })),
    };
  });
}

function lineData({ lines }: Panel, panel: number, layout: AxisLayout): Data[] {
  const place = new Map(layout.values.map((value, index) => [value, layout.positions[index]]));
  const values = lines.flatMap(({ label, curve }) =>
    curve.points.map(({ x, value, error, state }) => ({
      label,
      x: place.get(x),
      y: value,
      low: value === null || error === null ? null : value - error,
      high: value === null || error === null ? null : value + error,
      state,
    })),
  );
  const known = { type: 'filter', expr: 'datum.y !== null' } as const;
  return [
    { name: `line${panel}`, values },
    { name: `point${panel}`, source: `line${panel}`, transform: [known] },
    { name: `bar${panel}`, source: `line${panel}`, transform: [{ type: 'filter', expr: 'datum.low !== null' }] },
  ];
}

function curveMarks(panel: number): Mark[] {
  const colour = { scale: 'colour', field: 'label' };
  const at = { x: { scale: 'x', field: 'x' }, y: { scale: 'y', field: 'y' } };
  return [
    {
      type: 'group',
      from: { facet: { name: `series${panel}`, data: `line${panel}`, groupby: 'label' } },
      marks: [
        {
          type: 'line',
          from: { data: `series${panel}` },
          encode: { update: { ...at, stroke: colour, strokeWidth: { value: 1.6 }, defined: { signal: 'datum.y !== null' } } },
        },
      ],
    },
    {
      type: 'rule',
      from: { data: `bar${panel}` },
      encode: { update: { x: at.x, y: { scale: 'y', field: 'low' }, y2: { scale: 'y', field: 'high' }, stroke: colour } },
    },
    {
      type: 'symbol',
      from: { data: `point${panel}` },
      encode: {
        update: {
          ...at,
          size: { value: 16 },
          fill: [{ test: "datum.state === 'doubtful'", value: 'white' }, colour],
          stroke: colour,
          strokeWidth: { value: 1.2 },
        },
      },
    },
  ];
}

function panelMark(figure: CutFigure, panels: readonly Panel[], panel: number, columns: number, layout: AxisLayout): GroupMark {
  const column = panel % columns;
  const lowest = panel + columns >= panels.length;
  const head = panels[panel].head;
  return {
    type: 'group',
    encode: {
      update: {
        x: { value: column * (PANEL.width + PANEL.gapX) },
        y: { value: Math.floor(panel / columns) * (PANEL.height + PANEL.gapY) },
        width: { value: PANEL.width },
        height: { value: PANEL.height },
        stroke: { value: INK },
      },
    },
    signals: [
      { name: 'width', value: PANEL.width },
      { name: 'height', value: PANEL.height },
    ],
    scales: [positionScale('x', layout)],
    title: panelHeading(head),
    axes: [
      positionAxis('x', layout, lowest ? figure.labels.axisTitle(figure.along) : null),
      {
        orient: 'left',
        scale: 'y',
        tickCount: 6,
        grid: true,
        gridColor: '#ececec',
        ...(column === 0 ? { title: quantityTitle(figure.quantity) } : {}),
      },
    ],
    marks: curveMarks(panel),
  };
}

function valueScale(curves: readonly Curve[]): { type: 'linear' | 'log'; domain: [number, number] } {
  const known = curves.flatMap(({ points }) =>
    points.flatMap(({ value, error }) => (value === null ? [] : [{ value, error: error ?? 0 }])),
  );
  const least = Math.min(...known.map(({ value }) => value), Infinity);
  // Error bars stay inside the frame; one that reaches below zero must not keep positive values off a logarithmic scale.
  const reach = Math.min(...known.map(({ value, error }) => value - error), Infinity);
  const high = Math.max(...known.map(({ value, error }) => value + error), -Infinity);
  const low = least > 0 && reach <= 0 && high / least > 1e3 ? least : reach;
  if (low > high) return { type: 'linear', domain: [0, 1] };
  if (low > 0 && high / low > 1e3) return { type: 'log', domain: [low / 1.3, high * 1.3] };
  const room = high === low ? 0.5 : 0.04 * (high - low);
  // Zero is part of the picture where values come near it.
  return { type: 'linear', domain: [low >= 0 && low < 0.3 * high ? 0 : low - room, high + room] };
}

/** @returns a complete Vega specification; its size follows from the number of panels and lines */
export function cutFigureSpec(figure: CutFigure): Spec {
  const { curves, labels, quantity } = figure;
  const panels = panelsOf(curves);
  const names = [...new Set(panels.flatMap(({ lines }) => lines.map(({ label }) => label)))];
  const columns = Math.min(COLUMNS, Math.max(1, panels.length));
  const rows = Math.ceil(panels.length / columns);
  const width = columns * PANEL.width + (columns - 1) * PANEL.gapX;
  const height = rows * PANEL.height + (rows - 1) * PANEL.gapY;
  const layout = layoutAxis([...new Set(curves.flatMap(({ points }) => points.map(({ x }) => x)))].sort((a, b) => Number(a) - Number(b)));
  const doubtful = curves.some(({ points }) => points.some(({ state }) => state === 'doubtful'));
  const legend = names.length > 1;
  // Long names of questions don't fit beside the panel.
  const below = legend && names.some((name) => name.length > 26);
  const legendHeight = below ? names.length * 16 + 10 : 0;
  const key = keyMarks(doubtful ? [{ kind: 'hollow', text: 'doubtful' }] : [], 0, height + BELOW_AXIS + legendHeight, width);
  const captionTop = height + BELOW_AXIS + legendHeight + key.height;
  const longest = Math.max(...names.map((name) => textWidth(name, 11)), 0) + 44;
  const beside = legend && !below ? longest * (names.length > LEGEND_ROWS ? 2 : 1) : 0;
  const captionWidth = Math.max(width + Math.min(beside, 100), below ? longest : 0, 400);
  const sentences = [
    `${labels.sweep}: ${quantity.name.replaceAll('_', ' ')} of ${labels.model} along ${figure.along}.`,
    ...figure.notes,
    ...unitSentences(labels),
  ];
  const caption = wrapText(keepTogether(sentences.join(' ')), captionWidth, CAPTION_SIZE);
  const lineHeight = CAPTION_SIZE * 1.4;
  const heads = Math.max(...panels.map(({ head }) => head.length), 1);
  return {
    $schema: 'https://vega.github.io/schema/vega/v6.json',
    description: `${quantity.name} along ${figure.along} in the sweep ${labels.sweep}`,
    width,
    height,
    autosize: 'none',
    padding: {
      left: 74,
      top: heads * 15 + 22,
      right: Math.max(beside + 18, captionWidth - width + 12, 24),
      bottom: captionTop - height + caption.length * lineHeight + 12,
    },
    config: FIGURE_CONFIG,
    data: panels.flatMap((panel, index) => lineData(panel, index, layout)),
    scales: [
      { name: 'y', ...valueScale(curves), range: [PANEL.height, 0], nice: false, zero: false },
      {
        name: 'colour',
        type: 'ordinal',
        domain: names,
        range: names.length <= COLOURS.length ? [...COLOURS] : { scheme: 'viridis', count: names.length, extent: [0, 0.92] },
      },
    ],
    legends: legend
      ? [
          {
            stroke: 'colour',
            type: 'symbol',
            symbolType: 'stroke',
            symbolStrokeWidth: 2.4,
            orient: 'none',
            legendX: below ? 0 : width + 18,
            legendY: below ? height + BELOW_AXIS : 0,
            columns: below || names.length <= LEGEND_ROWS ? 1 : 2,
          },
        ]
      : [],
    marks: [
      ...panels.map((_, index) => panelMark(figure, panels, index, columns, layout)),
      ...key.marks,
      captionMark(caption, captionTop, CAPTION_SIZE, lineHeight),
    ],
  };
}
