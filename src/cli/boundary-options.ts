/** How commands say which boundary is meant, and boundaries as tables, rows and documents. */
import { Command, Option } from 'commander';
import { type Boundary, boundaryOf, type BoundaryRule } from '../analysis/boundary.js';
import { curvesOf } from '../analysis/curves.js';
import { findQuantity, ORDER_PARAMETERS, type Quantity } from '../analysis/quantities.js';
import type { Sample } from '../analysis/samples.js';
import type { Json } from '../core/json.js';
import { coordinatesText, formatNumber, scheduleText } from '../report/format.js';
import { renderTable } from '../report/table.js';
import { parseNumber } from './options.js';

export interface BoundaryOptions {
  readonly boundary?: string;
  readonly level?: string;
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
    .addOption(
      new Option('--level <value>', 'boundary where the order parameter crosses this value; without it, where it changes most steeply'),
    );
}

/** @throws WindrowError `analysis.field`, `cli.usage` */
export function boundaryChoice({ boundary, level }: BoundaryOptions): BoundaryChoice {
  const quantity = boundary === undefined ? ORDER_PARAMETERS[0] : findQuantity(boundary);
  const name = quantity.name.replaceAll('_', ' ');
  if (level === undefined) return { quantity, rule: { kind: 'steepest' }, words: `steepest change of the ${name}` };
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

/** One row for each size, with the columns `low`, `estimate`, `high` of every question beside each other where they are few. */
export function boundaryTable(boundaries: readonly Boundary[]): string {
  const several = new Set(boundaries.map(({ questionOrdinal }) => questionOrdinal)).size > 1;
  return renderTable(boundaries, [
    ...(several ? [{ title: 'schedule', value: ({ question }: Boundary) => scheduleText(question.schedule) }] : []),
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
    schedule: boundary.question.schedule as Json,
    budget: boundary.question.budget,
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
