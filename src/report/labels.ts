/** What figures and tables say about a sweep: titles of axes with their units, the model, the question and its resolution. */
import type { Quantity } from '../analysis/quantities.js';
import type { Coordinates, Sample } from '../analysis/samples.js';
import type { ModelFamily } from '../models/types.js';
import type { Question } from '../statistics/types.js';
import type { Grid } from '../sweep/types.js';
import { coordinatesText, formatNumber, scheduleText } from './format.js';

export interface SweepLabels {
  readonly sweep: string;
  readonly model: string;
  /** ħ = 1: times are in its inverse. */
  readonly energyUnit: string;
  axisTitle(axis: string): string;
}

export function sweepLabels(
  grid: Pick<Grid, 'name' | 'model' | 'axes'>,
  family: Pick<ModelFamily, 'energyUnit' | 'size' | 'coupling'>,
): SweepLabels {
  const units = new Map(grid.axes.map(({ name, unit }) => [name, unit]));
  const fallback = new Map([
    ['size', `${family.size.symbol}, ${family.size.meaning}`],
    ['coupling', `${family.coupling.symbol} (${family.energyUnit})`],
  ]);
  return {
    sweep: grid.name,
    model: grid.model,
    energyUnit: family.energyUnit,
    axisTitle(axis) {
      const unit = units.get(axis) ?? fallback.get(axis) ?? '';
      return unit === '' || unit === '1' ? axis : `${axis}: ${unit}`;
    },
  };
}

/** 'time' and 'energy' of the field table in the family's own unit. */
export function unitText(unit: string, energyUnit: string): string {
  if (unit === '1' || unit === '') return '';
  return unit.replace('energy', energyUnit).replace('time', `1/${energyUnit}`);
}

export function quantityTitle(quantity: Pick<Quantity, 'name' | 'unit'>, energyUnit: string): string {
  const unit = unitText(quantity.unit, energyUnit);
  return quantity.name.replaceAll('_', ' ') + (unit === '' ? '' : ` (${unit})`);
}

/** The head of a panel: the schedule, and the axes that the panel holds fixed. */
export function panelTitle(question: Question, at: Coordinates): string {
  return [scheduleText(question.schedule), coordinatesText(at)].filter((part) => part !== '').join(' · ');
}

/** For example 'K = 2000, δ = 0.002 J, ε = 0.0005'. */
export function resolutionText(question: Question, resolution: Sample['resolution'], energyUnit: string): string {
  const parts = [`K = ${formatNumber(question.budget)}`];
  if (resolution) parts.push(`δ = ${formatNumber(resolution.energy)} ${energyUnit}`, `ε = ${formatNumber(resolution.weight)}`);
  if (question.detector.efficiency !== 1) parts.push(`efficiency ${formatNumber(question.detector.efficiency)}`);
  return parts.join(', ');
}
