/**
 * The sweep file's schema: every key, what it means and which values it takes, declared once in zod. Validation, the JSON Schema that
 * editors use and the words of error messages come from here.
 *
 * One schema a model family, so that parameter names and coupling scales are those of the family. Rules that join several keys (a
 * state that fits every size, a range whose step reaches its end) are not a matter of form; see document.ts and check.ts.
 */
import { z } from 'zod';
import { WindrowError } from '../core/errors.js';
import type { Json } from '../core/json.js';
import { modelFamilies } from '../models/registry.js';
import type { ModelFamily } from '../models/types.js';
import { scheduleFamilies } from '../schedules/registry.js';
import type { ScheduleFamily } from '../schedules/types.js';
import { axisSchema, mapping, type AxisKind } from './axis.js';

/** Measured intervals an empirical schedule may hold; each costs one term of every characteristic function. */
export const INTERVALS_LIMIT = 100_000;

/** A parameter as a family declares it: the schema of one value, and how an axis of such values is written. */
export interface ParameterDeclaration {
  readonly value: z.ZodType;
  readonly kind: AxisKind;
  /** undefined where the parameter has to be given */
  readonly defaultValue: Json | undefined;
}

const declarationCache = new WeakMap<z.ZodType, ReadonlyMap<string, ParameterDeclaration>>();

/** The parameters of a family, in the order it declares them. */
export function declaredParameters(schema: z.ZodType): ReadonlyMap<string, ParameterDeclaration> {
  const known = declarationCache.get(schema);
  if (known !== undefined) return known;
  const object = schema instanceof z.ZodPipe ? schema.in : schema;
  if (!(object instanceof z.ZodObject)) {
    throw new WindrowError('internal.invariant', 'a family declares its parameters by something else than a zod object');
  }
  const shape = object.shape as Record<string, z.ZodType>;
  const declared = new Map(Object.entries(shape).map(([name, declared]) => [name, declaration(declared)]));
  declarationCache.set(schema, declared);
  return declared;
}

function declaration(declared: z.ZodType): ParameterDeclaration {
  const absent = declared.safeParse(undefined);
  const description = declared.description ?? innermost(declared).description;
  const inner = innermost(declared);
  const value = description === undefined ? inner : inner.describe(description);
  const types = jsonTypes(value);
  const numeric = types.has('number') || types.has('integer');
  const listValued = types.has('array');
  return {
    value,
    kind: { one: [...types].map(typeWord).join(' or '), numeric, listValued },
    defaultValue: absent.success ? (absent.data as Json | undefined) : undefined,
  };
}

function innermost(schema: z.ZodType): z.ZodType {
  if (schema instanceof z.ZodDefault || schema instanceof z.ZodOptional || schema instanceof z.ZodPrefault) {
    return innermost(schema.unwrap() as z.ZodType);
  }
  return schema;
}

interface TypeNode {
  readonly type?: string | readonly string[];
  readonly enum?: readonly unknown[];
  readonly const?: unknown;
  readonly anyOf?: readonly TypeNode[];
  readonly oneOf?: readonly TypeNode[];
}

function jsonTypes(schema: z.ZodType): Set<string> {
  const types = new Set<string>();
  const visit = (node: TypeNode): void => {
    const literals = node.enum ?? (node.const === undefined ? [] : [node.const]);
    if (literals.length > 0) types.add(literals.map((literal) => String(literal)).join(' | '));
    else if (node.type !== undefined) for (const type of [node.type].flat()) types.add(type);
    for (const branch of node.anyOf ?? node.oneOf ?? []) visit(branch);
  };
  visit(z.toJSONSchema(schema, { io: 'input', unrepresentable: 'any' }));
  return types;
}

const TYPE_WORDS: Readonly<Record<string, string>> = { number: 'a number', integer: 'a whole number', array: 'a list', string: 'a text' };
const typeWord = (type: string): string => TYPE_WORDS[type] ?? type;

const numberKind: AxisKind = { one: 'a number', numeric: true, listValued: false };
const integerKind: AxisKind = { one: 'a whole number', numeric: true, listValued: false };

export const sizeValue = z.int().min(1);
export const couplingValue = z.number();
export const budgetValue = z.int().min(1).max(1_000_000_000);
export const energyValue = z.union([z.literal('auto'), z.number().min(0)], { error: 'auto or a number of at least 0' });
export const weightValue = z.union([z.literal('auto'), z.number().min(0).lt(1)], { error: 'auto or a number from 0, below 1' });
export const efficiencyValue = z.number().gt(0).max(1);
export const strengthValue = z.number().min(0);

const seed = z.int().min(0).describe('seed of the random stream; the same seed gives the same numbers everywhere');

const amplitude = z.union([z.number(), z.tuple([z.number(), z.number()])], { error: 'a number or [real, imaginary]' });

const STATE_FORMS =
  'a state name, { occupation: [...] }, { product: "…" }, { site: n }, { random: { seed, like } }, { uniform: { like } }, ' +
  '{ ground-state: { coupling, as, parameters, within } }, { superposition: [[amplitude, state], …] }';

const quench = mapping({
  coupling: z.number().optional().describe('coupling of the other Hamiltonian; default that of the point'),
  as: z.string().optional().describe("scale of that coupling; default the family's own"),
  parameters: z.record(z.string(), z.json()).optional().describe('parameters that differ from those of the point'),
  within: z.lazy(() => stateValue).optional(),
}).describe('the ground state of another coupling, in the sector of `within` (default: the first named state)');

/** A state as a family resolves it; whether it fits the model is the family's to say. */
export const stateValue: z.ZodType = z.lazy(() =>
  z.union(
    [
      z.string().min(1),
      mapping({ occupation: z.array(z.number()).min(1).describe('occupation or local quantum number of each site') }),
      mapping({ product: z.string().min(1).describe('the same as a quoted text, one character a site') }),
      mapping({ site: z.int().min(1).describe('one particle on this site, counted from 1') }),
      mapping({
        random: mapping({
          seed: z.int().describe('seed of the draw'),
          like: stateValue.optional(),
        }).describe('a basis state drawn evenly, from those with the conserved numbers of `like`'),
      }),
      mapping({
        uniform: mapping({ like: stateValue }).describe('equal superposition of basis states'),
      }),
      mapping({ 'ground-state': quench }),
      mapping({
        superposition: z
          .array(z.tuple([amplitude, stateValue]))
          .min(1)
          .describe('[amplitude, state] pairs; normalised when built'),
      }),
    ],
    { error: STATE_FORMS },
  ),
);

const stateKind: AxisKind = { one: STATE_FORMS, numeric: false, listValued: false };

function parameterShape(declared: ReadonlyMap<string, ParameterDeclaration>): Record<string, z.ZodType> {
  return Object.fromEntries(
    [...declared].map(([name, parameter]) => {
      const axis = axisSchema(parameter.value, parameter.kind).describe(parameter.value.description ?? name);
      return [name, parameter.defaultValue === undefined ? axis : axis.optional()];
    }),
  );
}

export const deadTimeValue = z.number().min(0);

function scheduleSchema(family: ScheduleFamily) {
  const shape = parameterShape(declaredParameters(family.parameters));
  if ('intervals' in shape) {
    // Exactly one of the two is needed; read.ts turns a file into its intervals before anything else looks.
    shape['intervals'] = shape['intervals'].optional();
    const path = z.string().min(1);
    shape['file'] = axisSchema(path, { one: 'a path', numeric: false, listValued: false })
      .optional()
      .describe('a text file of measured intervals, one a line, instead of `intervals`; relative to the sweep file');
  }
  return mapping({
    family: z.literal(family.name).describe(family.summary),
    ...shape,
    'dead-time': axisSchema(deadTimeValue, numberKind).optional().describe('dead time added to every interval; default 0'),
  });
}

type Branches = [ReturnType<typeof scheduleSchema>, ...ReturnType<typeof scheduleSchema>[]];
const schedules = z
  .array(z.discriminatedUnion('family', [...scheduleFamilies.values()].map(scheduleSchema) as Branches))
  .min(1)
  .describe('interval distributions; a list inside one is an axis of that schedule');

const questionShape = {
  schedules,
  resolution: mapping({
    energy: axisSchema(energyValue, { ...numberKind, one: 'auto or a number' }).optional(),
    weight: axisSchema(weightValue, { ...numberKind, one: 'auto or a number' }).optional(),
  })
    .optional()
    .describe('below which energy difference and weight levels count as one or none; auto (default) is what the budget can show'),
  budget: axisSchema(budgetValue, integerKind).describe('number of measurements'),
  detector: mapping({
    efficiency: axisSchema(efficiencyValue, numberKind).optional().describe('probability that a detector click is seen; default 1'),
    'dark-counts': z.literal(0).optional().describe('not computed: only 0 is allowed'),
  }).optional(),
  sampling: mapping({ draws: z.int().min(2).max(1_000_000).describe('drawn schedules a cell'), seed: seed.optional() })
    .optional()
    .describe('winding numbers of drawn schedules besides the exact averages'),
  certify: z.boolean().optional().describe('count accessible dimensions exactly, by modular arithmetic; default false'),
};

const cache = new Map<string, ReturnType<typeof buildSchema>>();

/** The schema of a sweep file over one model family. */
export function documentSchema(family: ModelFamily): ReturnType<typeof buildSchema> {
  const known = cache.get(family.name) ?? buildSchema(family);
  cache.set(family.name, known);
  return known;
}

function buildSchema(family: ModelFamily) {
  const scales = family.scales.map((scale) => scale.name);
  const as = z
    .enum(scales as [string, ...string[]])
    .optional()
    .describe(`scale of the values: ${family.scales.map((scale) => `${scale.name} (${scale.meaning})`).join(', ')}`);
  const size = axisSchema(sizeValue, integerKind).describe(`${family.size.symbol}: ${family.size.meaning}`);
  const declared = declaredParameters(family.parameters);
  const parameters = mapping(parameterShape(declared)).describe('parameters of the model; any of them may be an axis');
  return mapping({
    name: z
      .string()
      .regex(/^[A-Za-z0-9][A-Za-z0-9._-]{0,99}$/)
      .describe('name of the sweep in the store: letters, digits, dot, dash, underscore'),
    model: z.literal(family.name).describe(family.summary),
    size: hasOneSize(family) ? size.optional() : size,
    coupling: axisSchema(couplingValue, { ...numberKind, extra: { as } }).describe(`${family.coupling.symbol}: ${family.coupling.meaning}`),
    parameters: [...declared.values()].some((one) => one.defaultValue === undefined) ? parameters : parameters.optional(),
    prepare: axisSchema(stateValue, stateKind).describe('the prepared state; a list is an axis'),
    detect: axisSchema(stateValue, stateKind).optional().describe('the detected state, or same (default) for the return problem'),
    ...(family.disordered
      ? {
          disorder: mapping({
            strength: axisSchema(strengthValue, numberKind).describe(`full width of the on-site energies, in ${family.energyUnit}`),
            realisations: z.int().min(1).max(AXIS_REALISATIONS).optional().describe('number of realisations; default 1'),
            seed: seed.optional(),
          }).optional(),
        }
      : {}),
    ...questionShape,
  });
}

const AXIS_REALISATIONS = 1_000_000;

export const hasOneSize = (family: ModelFamily): boolean => family.size.minimum === family.size.maximum;

/** The JSON Schema (draft 2020-12) of sweep files, for editors and other programs. */
export function sweepJsonSchema(): Record<string, unknown> {
  const families = [...modelFamilies.values()].map((family) => documentSchema(family));
  const schema = z.toJSONSchema(z.discriminatedUnion('model', families as [(typeof families)[number]]), {
    io: 'input',
    unrepresentable: 'any',
    reused: 'ref',
  });
  return { title: 'windrow sweep file', ...schema };
}
