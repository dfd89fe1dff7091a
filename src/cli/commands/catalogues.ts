/** `windrow models`, `windrow schedules`, `windrow schema`: what a sweep file may say. */
import type { Command } from 'commander';
import type { z } from 'zod';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import { findModel, modelFamilies } from '../../models/registry.js';
import type { ModelFamily } from '../../models/types.js';
import { renderPairs, renderTable } from '../../report/table.js';
import { scheduleFamilies } from '../../schedules/registry.js';
import type { ScheduleFamily } from '../../schedules/types.js';
import { declaredParameters, sweepJsonSchema } from '../../sweep/schema.js';
import { type Context, EXIT, type Io } from '../context.js';
import { verb } from '../options.js';
import { print, writeText } from '../print.js';
import { runVerb } from '../run-verb.js';

interface Parameter {
  readonly name: string;
  readonly kind: string;
  readonly default: Json;
  readonly meaning: string;
}

function parametersOf(schema: z.ZodType): Parameter[] {
  return [...declaredParameters(schema)].map(([name, { value, kind, defaultValue }]) => ({
    name,
    kind: kind.one,
    default: defaultValue ?? null,
    meaning: value.description ?? '',
  }));
}

function parameterTable(parameters: readonly Parameter[]): string {
  return renderTable(parameters, [
    { title: 'parameter', value: ({ name }) => name },
    { title: 'value', value: ({ kind }) => kind },
    { title: 'default', value: ({ default: standard }) => (standard === null ? '–' : JSON.stringify(standard)) },
    { title: 'meaning', value: ({ meaning }) => meaning },
  ]);
}

function modelDocument(family: ModelFamily): { readonly [key: string]: Json } {
  const { name, summary, source, energyUnit, size, coupling, scales, disordered, states } = family;
  return {
    name,
    summary,
    source,
    energy_unit: energyUnit,
    size: { ...size },
    coupling: { ...coupling },
    scales: scales.map(({ name: scale, meaning }) => ({ name: scale, meaning })),
    parameters: parametersOf(family.parameters) as unknown as Json,
    states: states.map((state) => ({ name: state.name, meaning: state.meaning })),
    disorder: disordered,
  };
}

function modelText(family: ModelFamily): string {
  const { size, coupling, scales, states, disordered } = family;
  const range = size.minimum === size.maximum ? `always ${size.minimum}` : `${size.minimum} to ${size.maximum}`;
  return [
    renderPairs([
      ['model', family.name],
      ['', family.summary],
      ['size', `${size.symbol}: ${size.meaning}, ${range}`],
      ['coupling', `${coupling.symbol}: ${coupling.meaning}`],
      ...scales.map((scale) => [`as: ${scale.name}`, scale.meaning] as const),
      ['energies', `in ${family.energyUnit}; times in its inverse, ħ = 1`],
      ['disorder', disordered ? 'random on-site energies' : 'none'],
      ['source', family.source],
    ]),
    parameterTable(parametersOf(family.parameters)),
    renderTable(states, [
      { title: 'state', value: ({ name }) => name },
      { title: 'meaning', value: ({ meaning }) => meaning },
    ]),
  ].join('\n\n');
}

/** @throws WindrowError `schedule.unknown` */
function findSchedule(name: string): ScheduleFamily {
  const family = scheduleFamilies.get(name);
  if (family) return family;
  throw new WindrowError('schedule.unknown', 'no such schedule family', { found: name, allowed: [...scheduleFamilies.keys()].join(', ') });
}

function scheduleDocument(family: ScheduleFamily): { readonly [key: string]: Json } {
  const { name, summary, characteristic, source } = family;
  return { name, summary, characteristic, source, parameters: parametersOf(family.parameters) as unknown as Json };
}

function scheduleTextOf(family: ScheduleFamily): string {
  return [
    renderPairs([
      ['schedule', family.name],
      ['', family.summary],
      ['χ(x)', family.characteristic],
      ['source', family.source],
    ]),
    parameterTable(parametersOf(family.parameters)),
    'Every family also takes dead-time, a time added to each interval (default 0).',
  ].join('\n\n');
}

/** One family in full, or all in a line each. */
async function printFamilies<Family extends { readonly name: string; readonly summary: string }>(
  context: Context,
  families: readonly Family[],
  one: Family | null,
  document: (family: Family) => { readonly [key: string]: Json },
  text: (family: Family) => string,
): Promise<void> {
  await print(context, {
    table: () =>
      one
        ? text(one)
        : renderTable(families, [
            { title: 'name', value: ({ name }) => name },
            { title: 'summary', value: ({ summary }) => summary },
          ]),
    json: () => (one ? document(one) : families.map(document)),
    csv: () => ({ columns: ['name', 'summary'], rows: (one ? [one] : families).map(({ name, summary }) => ({ name, summary })) }),
  });
}

export function catalogueCommands(program: Command, io: Io): void {
  verb(program, 'models', 'model families; with a name, its size, coupling, parameters and states')
    .argument('[name]', 'name of a family')
    .action(
      runVerb<[string | undefined], object>(io, {}, async (context, _options, name) => {
        await printFamilies(context, [...modelFamilies.values()], name === undefined ? null : findModel(name), modelDocument, modelText);
        return EXIT.done;
      }),
    );
  verb(program, 'schedules', 'schedule families; with a name, its parameters and characteristic function')
    .argument('[name]', 'name of a family')
    .action(
      runVerb<[string | undefined], object>(io, {}, async (context, _options, name) => {
        const one = name === undefined ? null : findSchedule(name);
        await printFamilies(context, [...scheduleFamilies.values()], one, scheduleDocument, scheduleTextOf);
        return EXIT.done;
      }),
    );
  program
    .command('schema')
    .description('JSON Schema of sweep files, for editors')
    .action(
      runVerb<[], object>(io, { format: 'json' }, async (context) => {
        await writeText(context.out, `${JSON.stringify(sweepJsonSchema(), null, 2)}\n`);
        return EXIT.done;
      }),
    );
}
