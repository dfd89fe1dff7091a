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
  /** What energies are measured in, as a phrase; ħ = 1, so times are in its inverse. */
  readonly energyUnit: string;
  axisTitle(axis: string): string;
}

export function sweepLabels(
  grid: Pick<Grid, 'name' | 'model' | 'axes'>,
  family: Pick<ModelFamily, 'energyUnit' | 'size' | 'coupling' | 'scales'>,
): SweepLabels {
  const units = new Map(grid.axes.map(({ name, unit }) => [name, unit]));
  const [own] = family.scales;
  const titles = new Map<string, string>([['size', `size ${family.size.symbol}: ${family.size.meaning}`]]);
  const scale = units.get('coupling') ?? own.meaning;
  titles.set('coupling', scale === own.meaning ? `coupling ${family.coupling.symbol}: ${family.coupling.meaning}` : `coupling: ${scale}`);
  return {
    sweep: grid.name,
    model: grid.model,
    energyUnit: family.energyUnit,
    axisTitle(axis) {
      const unit = units.get(axis) ?? '';
      return titles.get(axis) ?? (unit === '' || unit === '1' ? axis : `${axis}: ${unit}`);
    },
  };
}

/** The sentence of a caption that says what the numbers are measured in and what K, δ and ε are. */
export function unitSentences({ energyUnit }: SweepLabels): string[] {
  return [
    `Energies are in the unit ${energyUnit.startsWith('that of') ? energyUnit.slice('that '.length) : energyUnit}, ħ = 1.`,
    'K is the number of measurements; levels closer than δ count as one, and groups of total weight below ε are left out.',
  ];
}

export function quantityTitle(quantity: Pick<Quantity, 'name' | 'unit'>): string {
  const bare = quantity.unit === '1' || quantity.unit === '';
  return quantity.name.replaceAll('_', ' ') + (bare ? '' : ` (${quantity.unit})`);
}

/** The head of a panel: the schedule, and the axes that the panel holds fixed. */
export function panelTitle(question: Question, at: Coordinates): string {
  return [scheduleText(question.schedule), coordinatesText(at)].filter((part) => part !== '').join(' · ');
}

/** For example 'K = 2000, δ = 0.002, ε = 0.0005'. */
export function resolutionText(question: Question, resolution: Sample['resolution']): string {
  const parts = [`K = ${formatNumber(question.budget)}`];
  if (resolution) parts.push(`δ = ${formatNumber(resolution.energy)}`, `ε = ${formatNumber(resolution.weight)}`);
  if (question.detector.efficiency !== 1) parts.push(`efficiency ${formatNumber(question.detector.efficiency)}`);
  return parts.join(', ');
}

/** One title a question: its schedule, and of budget, resolution and efficiency what tells it from the others. */
export function questionTitles(questions: readonly Question[]): string[] {
  const parts: readonly ((question: Question) => string)[] = [
    ({ budget }) => `K ${formatNumber(budget)}`,
    ({ resolution: { energy } }) => `δ ${energy === 'auto' ? energy : formatNumber(energy)}`,
    ({ resolution: { weight } }) => `ε ${weight === 'auto' ? weight : formatNumber(weight)}`,
    ({ detector }) => `efficiency ${formatNumber(detector.efficiency)}`,
  ];
  const telling = parts.filter((part) => new Set(questions.map(part)).size > 1);
  return questions.map((question) => [scheduleText(question.schedule), ...telling.map((part) => part(question))].join('; '));
}
