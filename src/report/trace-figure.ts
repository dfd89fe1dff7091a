/**
 * The trace figure: time series of one point as a Vega specification, four panels. (a) first detection F_n and survival S_n, (b) averaged
 * transition probability with its recurrent level, (c) winding phase over the circle, (d) size of the time correlations. Pure.
 */
import type { Axis, Data, GroupMark, Mark, Scale, Spec } from 'vega';
import type { Question } from '../statistics/types.js';
import type { Trace } from '../statistics/trace.js';
import { captionMark, FAINT, FIGURE_CONFIG, INK, keepTogether, panelHeading, wrapText } from './figure-parts.js';
import { scheduleText } from './format.js';
import { resolutionText } from './labels.js';

export interface TraceFigure {
  readonly trace: Trace;
  readonly question: Question;
  /** What the point is, for the caption. */
  readonly title: string;
  readonly notes: readonly string[];
}

const PANEL = { width: 300, height: 210, gapX: 96, gapY: 92 } as const;
const CAPTION_SIZE = 11;
const BELOW_AXIS = 58;
const COLOURS = { first: '#0072b2', second: '#d55e00' } as const;
const SMALLEST = 1e-300;
/** Decades below the greatest value that a logarithmic axis shows. */
const DECADES = 12;

interface Panel {
  readonly head: string;
  readonly x: string;
  readonly y: string;
  readonly scales: readonly Scale[];
  readonly marks: readonly Mark[];
  readonly axes?: Partial<Axis>;
}

const scale = (name: 'x' | 'y', domain: readonly [number, number], type: 'linear' | 'log' = 'linear'): Scale => ({
  name,
  type,
  domain: [...domain],
  range: name === 'x' ? 'width' : 'height',
  nice: false,
  zero: false,
  clamp: true,
});

function line(data: string, stroke: string, field = 'y'): Mark {
  return {
    type: 'line',
    from: { data },
    encode: {
      update: {
        x: { scale: 'x', field: 'x' },
        y: { scale: 'y', field },
        stroke: { value: stroke },
        strokeWidth: { value: 1.4 },
        defined: { signal: `isValid(datum.${field})` },
      },
    },
  };
}

function level(value: number): Mark {
  return {
    type: 'rule',
    encode: {
      update: {
        x: { value: 0 },
        x2: { signal: 'width' },
        y: { scale: 'y', value },
        stroke: { value: FAINT },
        strokeDash: { value: [5, 3] },
      },
    },
  };
}

const points = (x: Float64Array, y: Float64Array, from = 0): { x: number; y: number | null }[] =>
  Array.from(y.subarray(from), (value, i) => ({ x: x[i + from], y: Number.isFinite(value) ? value : null }));

/** Zeros have no place on a logarithmic axis. */
const positive = (values: Float64Array): Float64Array => values.map((value) => (value > SMALLEST ? value : NaN));

function room(values: readonly number[]): [number, number] {
  const low = Math.min(...values);
  const high = Math.max(...values);
  const margin = high > low ? 0.05 * (high - low) : 0.5;
  return [low - margin, high + margin];
}

function panelsOf({ trace, question }: TraceFigure): { panels: Panel[]; data: Data[] } {
  const { detection, survival, transition, recurrentWeight, phase, correlation } = trace;
  const count = detection.length - 1;
  const counts = Float64Array.from(detection.keys());
  const shown = [...detection.subarray(1), ...survival].filter((value) => value > SMALLEST);
  const high = Math.max(...shown, SMALLEST * 10);
  const low = Math.max(Math.min(...shown, high / 10), high / 10 ** DECADES);
  const turns = phase.phase.map((value) => value / (2 * Math.PI));
  const angle = phase.angle.map((value) => value / Math.PI);
  const { size, re, im } = correlation;
  const cells = Array.from(re, (value, at) => ({ k: Math.floor(at / size), l: at % size, value: Math.hypot(value, im[at]) }));
  const domain: [number, number] = [0, Math.max(1, count)];
  const of = {
    exact: 'all measurements',
    budget: `the first ${question.budget} measurements`,
    draw: `${question.budget} drawn intervals`,
  }[phase.of];
  const panels: Panel[] = [
    {
      head: '(a) first detection F and survival S',
      x: 'measurement n',
      y: 'probability',
      scales: [scale('x', domain), scale('y', [low / 1.5, high * 1.5], 'log')],
      marks: [line('detection', COLOURS.first), line('survival', COLOURS.second)],
      axes: { format: '.0e', tickCount: 6 },
    },
    {
      head: '(b) averaged transition probability',
      x: 'measurement n',
      y: '⟨|u|²⟩',
      scales: [scale('x', domain), scale('y', room([...transition, recurrentWeight]))],
      marks: [level(recurrentWeight), line('transition', COLOURS.first)],
    },
    {
      head: `(c) winding phase, ${of}: ${phase.winding ?? 'not defined'}`,
      x: 'θ/π',
      y: 'phase/2π',
      scales: [scale('x', [0, 2]), scale('y', room([...turns].filter(Number.isFinite)))],
      marks: [line('phase', COLOURS.first)],
    },
    {
      head: '(d) time correlations |⟨u(t_k) u(t_l)*⟩|',
      x: 'l',
      y: 'k',
      scales: [scale('x', [-0.5, size - 0.5]), scale('y', [-0.5, size - 0.5])],
      marks: [
        {
          type: 'rect',
          from: { data: 'correlation' },
          encode: {
            update: {
              x: { scale: 'x', signal: 'datum.l - 0.5' },
              x2: { scale: 'x', signal: 'datum.l + 0.5' },
              y: { scale: 'y', signal: 'datum.k - 0.5' },
              y2: { scale: 'y', signal: 'datum.k + 0.5' },
              fill: { scale: 'colour', field: 'value' },
              stroke: { scale: 'colour', field: 'value' },
              strokeWidth: { value: 0.4 },
            },
          },
        },
      ],
    },
  ];
  return {
    panels,
    data: [
      { name: 'detection', values: points(counts, positive(detection), 1) },
      { name: 'survival', values: points(counts, positive(survival)) },
      { name: 'transition', values: points(counts, transition) },
      { name: 'phase', values: points(angle, turns) },
      { name: 'correlation', values: cells },
    ],
  };
}

function panelMark({ head, x, y, scales, marks, axes }: Panel, index: number): GroupMark {
  return {
    type: 'group',
    encode: {
      update: {
        x: { value: (index % 2) * (PANEL.width + PANEL.gapX) },
        y: { value: Math.floor(index / 2) * (PANEL.height + PANEL.gapY) },
        width: { value: PANEL.width },
        height: { value: PANEL.height },
        stroke: { value: INK },
      },
    },
    signals: [
      { name: 'width', value: PANEL.width },
      { name: 'height', value: PANEL.height },
    ],
    scales: [...scales],
    title: panelHeading([head]),
    axes: [
      { orient: 'bottom', scale: 'x', title: x, tickCount: 6 },
      { orient: 'left', scale: 'y', title: y, tickCount: 6, ...axes },
    ],
    marks: [...marks],
  };
}

/** @returns a complete Vega specification */
export function traceFigureSpec(figure: TraceFigure): Spec {
  const { panels, data } = panelsOf(figure);
  const { correlation, resolution } = figure.trace;
  const width = 2 * PANEL.width + PANEL.gapX;
  const height = 2 * PANEL.height + PANEL.gapY;
  const greatest = Array.from(correlation.re, (value, at) => Math.hypot(value, correlation.im[at])).reduce((a, b) => Math.max(a, b), 0);
  const sentences = [
    `${figure.title}.`,
    `${scheduleText(figure.question.schedule)}; ${resolutionText(figure.question, resolution)}.`,
    ...figure.notes,
    'F (blue) is the probability that measurement n is the first to detect, S (orange) that none up to n has; dashed: the recurrent level.',
  ];
  const caption = wrapText(keepTogether(sentences.join(' ')), width + 60, CAPTION_SIZE);
  const lineHeight = CAPTION_SIZE * 1.4;
  return {
    $schema: 'https://vega.github.io/schema/vega/v6.json',
    description: `time series of ${figure.title}`,
    width,
    height,
    autosize: 'none',
    padding: { left: 78, top: 34, right: 84, bottom: BELOW_AXIS + caption.length * lineHeight + 12 },
    config: FIGURE_CONFIG,
    data,
    scales: [{ name: 'colour', type: 'linear', domain: [0, greatest || 1], range: { scheme: 'viridis' } }],
    legends: [
      {
        fill: 'colour',
        type: 'gradient',
        orient: 'none',
        legendX: width + 18,
        legendY: PANEL.height + PANEL.gapY,
        gradientLength: PANEL.height - 30,
        gradientThickness: 12,
        tickCount: 5,
      },
    ],
    marks: [...panels.map(panelMark), captionMark(caption, height + BELOW_AXIS, CAPTION_SIZE, lineHeight)],
  };
}
