/** How commands say which boundary is meant, and boundaries as tables, rows and documents. */
import type { Command } from 'commander';
import { type Boundary, boundaryOf, type BoundaryRule } from '../analysis/boundary.js';
import { curvesOf, groupBy } from '../analysis/curves.js';
import { findQuantity, ORDER_PARAMETERS, type Quantity } from '../analysis/quantities.js';
import type { Sample } from '../analysis/samples.js';
import type { Json } from '../core/json.js';
import { coordinatesText, formatNumber } from '../report/format.js';
import { questionTitles } from '../report/labels.js';
import { renderTable } from '../report/table.js';
import { parseNumber } from './options.js';

/** Half of the greatest value: defined for every budget and size, and steady against the steps of whole numbers. */
const STANDARD_SHARE = '50%';

export interface BoundaryOptions {
  readonly boundary?: string;
  readonly level?: string;
  readonly steepest?: boolean;
}

export interface BoundaryChoice {
  readonly quantity: Quantity;
  readonly rule: BoundaryRule;
  /** For captions: 'steepest change of winding fraction'. */
  readonly words: string;
}

export function boundaryOptions(command: Command): Command {
  const names = ORDER_PARAMETERS.map(({ name }) => name).join(', ');
  return command
    .option('--boundary <field>', `order parameter of the boundary: ${names} or any numeric field`, ORDER_PARAMETERS[0].name)
    .option('--level <value>', 'boundary where the order parameter crosses this value, or a share of its greatest one', STANDARD_SHARE)
    .option('--steepest', 'boundary where it changes most steeply instead');
}

/** @throws WindrowError `analysis.field`, `cli.usage` */
export function boundaryChoice({ boundary, level = STANDARD_SHARE, steepest }: BoundaryOptions): BoundaryChoice {
  const quantity = boundary === undefined ? ORDER_PARAMETERS[0] : findQuantity(boundary);
  const name = quantity.name.replaceAll('_', ' ');
  if (steepest === true) return { quantity, rule: { kind: 'steepest' }, words: `steepest change of the ${name}` };
  if (level.endsWith('%')) {
    const allowed = 'a number, or a share above 0 % and below 100 %';
    const share = parseNumber('--level', level.slice(0, -1), allowed, (value) => value > 0 && value < 100) / 100;
    const words = share === 0.5 ? 'half' : `${formatNumber(100 * share)} %`;
    return { quantity, rule: { kind: 'share', share }, words: `${name} at ${words} of its greatest value` };
  }
  const value = parseNumber('--level', level);
  return { quantity, rule: { kind: 'level', level: value }, words: `${name} crosses ${formatNumber(value)}` };
}

export function boundariesOf(samples: readonly Sample[], { rule }: BoundaryChoice, along = 'coupling'): Boundary[] {
  return curvesOf(samples, along).map((curve) => boundaryOf(curve, rule));
}

function leftOut({ left_out }: Boundary): string {
  const parts = Object.entries(left_out).filter(([, count]) => count > 0);
  return parts.length === 0 ? '–' : parts.map(([reason, count]) => `${count} ${reason}`).join(', ');
}

function bracketText({ bracket, outcome }: Boundary): string {
  return bracket ? `[${formatNumber(bracket.low, 4)}, ${formatNumber(bracket.high, 4)}] ≈ ${formatNumber(bracket.estimate, 3)}` : outcome;
}

/** One row a place, one column a question: brackets side by side. */
export function boundaryOverview(boundaries: readonly Boundary[]): string {
  const questions = new Map(boundaries.map(({ questionOrdinal, question }) => [questionOrdinal, question]));
  const titles = questionTitles([...questions.values()]);
  const places = [...groupBy(boundaries, ({ at }) => JSON.stringify(at)).values()];
  return renderTable(places, [
    { title: 'at', value: ([first]) => coordinatesText(first.at) },
    ...[...questions.keys()].map((ordinal, index) => ({
      title: titles[index] ?? '',
      value: (place: readonly Boundary[]) => {
        const found = place.find(({ questionOrdinal }) => questionOrdinal === ordinal);
        return found ? bracketText(found) : '–';
      },
    })),
  ]);
}

/** One row a boundary, with what was left out and why. */
export function boundaryTable(boundaries: readonly Boundary[]): string {
  const questions = new Map(boundaries.map(({ questionOrdinal, question }) => [questionOrdinal, question]));
  const all = questionTitles([...questions.values()]);
  const titles = new Map([...questions.keys()].map((ordinal, index) => [ordinal, all[index] ?? '']));
  return renderTable(boundaries, [
    ...(questions.size > 1 ? [{ title: 'schedule', value: ({ questionOrdinal }: Boundary) => titles.get(questionOrdinal) ?? '' }] : []),
    { title: 'at', value: ({ at }) => coordinatesText(at) },
    {
      title: 'bracket',
      value: ({ bracket }) => (bracket ? `[${formatNumber(bracket.low, 6)}, ${formatNumber(bracket.high, 6)}]` : '–'),
    },
    { title: 'estimate', value: ({ bracket }) => (bracket ? formatNumber(bracket.estimate, 4) : '–'), align: 'right' },
    { title: 'left out', value: leftOut },
    { title: 'remark', value: ({ outcome, words }) => (outcome === 'bracket' ? words : `${outcome}: ${words}`) },
  ]);
}

export const BOUNDARY_COLUMNS = [
  'question',
  'schedule',
  'budget',
  'efficiency',
  'at',
  'outcome',
  'low',
  'estimate',
  'high',
  'value_low',
  'value_high',
  'candidates',
  'used',
  'doubtful',
  'failed',
  'missing',
  'undefined',
  'words',
] as const;

/** Flat; what `boundary --format json` and `--format csv` print. */
export function boundaryRow({ bracket, left_out, ...boundary }: Boundary): { readonly [key in (typeof BOUNDARY_COLUMNS)[number]]: Json } {
  return {
    question: boundary.questionOrdinal,
    schedule: boundary.question.schedule,
    budget: boundary.question.budget,
    efficiency: boundary.question.detector.efficiency,
    at: boundary.at,
    outcome: boundary.outcome,
    low: bracket?.low ?? null,
    estimate: bracket?.estimate ?? null,
    high: bracket?.high ?? null,
    value_low: bracket?.value_low ?? null,
    value_high: bracket?.value_high ?? null,
    candidates: boundary.candidates,
    used: boundary.used,
    ...left_out,
    words: boundary.words,
  };
}
