/**
 * Parameters of a family: checked, completed and described from the one zod schema the family declares. `model.parameter` errors name
 * the key, what was found and what is allowed.
 */
import { z } from 'zod';
import type { Json } from '../core/json.js';
import { refusal, showValue } from './refusal.js';
import type { ModelFamily } from './types.js';

/** One line of `windrow models NAME`. */
export interface ParameterDescription {
  readonly name: string;
  readonly meaning: string;
  readonly default: Json;
  readonly allowed: string;
  /** True where a list is a value of the parameter itself, so a list in a sweep file is not an axis. */
  readonly list: boolean;
}

interface SchemaNode {
  readonly type?: string | readonly string[];
  readonly description?: string;
  readonly default?: Json;
  readonly const?: Json;
  readonly enum?: readonly (string | number)[];
  readonly anyOf?: readonly SchemaNode[];
  readonly items?: SchemaNode;
  readonly minimum?: number;
  readonly maximum?: number;
  readonly exclusiveMinimum?: number;
  readonly exclusiveMaximum?: number;
  readonly properties?: { readonly [name: string]: SchemaNode };
}

function boundsOf(node: SchemaNode): string {
  const parts: string[] = [];
  if (node.minimum !== undefined && node.minimum > Number.MIN_SAFE_INTEGER) parts.push(`≥ ${node.minimum}`);
  if (node.exclusiveMinimum !== undefined) parts.push(`> ${node.exclusiveMinimum}`);
  if (node.maximum !== undefined && node.maximum < Number.MAX_SAFE_INTEGER) parts.push(`≤ ${node.maximum}`);
  if (node.exclusiveMaximum !== undefined) parts.push(`< ${node.exclusiveMaximum}`);
  return parts.length === 0 ? '' : ` ${parts.join(' and ')}`;
}

function allowedBy(node: SchemaNode): string {
  if (node.anyOf !== undefined) return node.anyOf.map(allowedBy).join(', or ');
  if (node.enum !== undefined) return node.enum.join(' | ');
  if (node.const !== undefined) return showValue(node.const);
  if (typeof node.type === 'object') return node.type.map((type) => allowedBy({ ...node, type })).join(', or ');
  if (node.type === 'integer') return `a whole number${boundsOf(node)}`;
  if (node.type === 'number') return `a finite number${boundsOf(node)}`;
  if (node.type === 'boolean') return 'true | false';
  if (node.type === 'array') return `a list, each ${allowedBy(node.items ?? {})}`;
  return node.type ?? 'any value';
}

const holdsList = (node: SchemaNode): boolean => node.type === 'array' || (node.anyOf ?? []).some(holdsList);

/** The parameters of a family in the order it declares them. */
export function describeParameters(family: ModelFamily): readonly ParameterDescription[] {
  const schema = z.toJSONSchema(family.parameters, { io: 'input' }) as unknown as SchemaNode;
  return Object.entries(schema.properties ?? {}).map(([name, node]) => ({
    name,
    meaning: node.description ?? '',
    default: node.default ?? null,
    allowed: allowedBy(node),
    list: holdsList(node),
  }));
}

const valueAt = (value: unknown, path: readonly PropertyKey[]): unknown =>
  path.reduce<unknown>((inner, key) => (inner as Record<PropertyKey, unknown> | null | undefined)?.[key], value);

function parameterRefusal(family: ModelFamily, raw: unknown, issue: z.core.$ZodIssue): Error {
  const described = describeParameters(family);
  if (issue.code === 'unrecognized_keys') {
    const key = issue.keys[0] ?? '';
    const names = described.map((parameter) => parameter.name).join(', ');
    return refusal('model.parameter', `${family.name} has no parameter "${key}"`, `parameters.${key}`, key, names === '' ? 'none' : names);
  }
  const name = issue.path[0];
  if (name === undefined)
    return refusal('model.parameter', 'parameters are not a mapping', 'parameters', raw, 'a mapping of names to values');
  const allowed = described.find((parameter) => parameter.name === name)?.allowed ?? issue.message;
  const where = ['parameters', ...issue.path.map(String)].join('.');
  return refusal('model.parameter', `parameter ${String(name)} is not allowed`, where, valueAt(raw, issue.path), allowed);
}

/**
 * Parameters checked against the family's schema, defaults filled in.
 * @param raw what a sweep file gives; undefined is the same as {}
 * @throws WindrowError model.parameter
 */
export function parseParameters<P>(family: ModelFamily<P>, raw: unknown = {}): P {
  const parsed = family.parameters.safeParse(raw);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0];
  throw issue === undefined ? parsed.error : parameterRefusal(family, raw, issue);
}

/**
 * Parameters as they enter an identity: checked, defaults filled in and, where the size is given, those that follow the size replaced
 * by their values, so that the same physics is written the same.
 * @throws WindrowError model.parameter
 */
export function canonicalParameters(family: ModelFamily, raw: unknown, size?: number): { readonly [name: string]: Json } {
  const parsed = parseParameters(family, raw);
  return (size === undefined ? parsed : (family.complete?.(parsed, size) ?? parsed)) as { readonly [name: string]: Json };
}
