/**
 * From the text of a sweep file to its value, with the line of every key.
 *
 * The text is foreign: size, encoding, nesting and the expansion of aliases are bounded before anything is built from it, so that no
 * file can exhaust memory or the stack. YAML 1.2 (core schema, one document, no tags); JSON is read by the same parser, and held to
 * JSON's own grammar where the file is called .json.
 */
import { isAlias, isMap, isScalar, isSeq, Lexer, LineCounter, parseDocument, visit, type Node, type Pair } from 'yaml';
import { WindrowError, type ErrorCode } from '../core/errors.js';
import type { KeyPath } from './refusal.js';

/** Bytes of a sweep file. */
export const FILE_LIMIT = 4 * 1024 * 1024;
/** Nested collections: far more than a sweep needs, far fewer than a stack holds. */
const DEPTH_LIMIT = 64;
/** Uses of one anchor, and values a file may hold once its aliases are expanded: what 4 MiB could hold written out. */
const ALIAS_LIMIT = 100;
const VALUE_LIMIT = 2_000_000;

export interface Source {
  readonly value: unknown;
  /** Line of a key, or of the nearest key above it that exists; counted from 1. */
  lineOf(path: KeyPath): number;
}

/**
 * UTF-8 text of a file's bytes.
 * @throws WindrowError sweep.file for other encodings and binary data, and above FILE_LIMIT
 */
export function decode(bytes: Uint8Array, file: string, limit = FILE_LIMIT): string {
  const refuse = (message: string, found: string): WindrowError =>
    new WindrowError('sweep.file', message, { where: file, found, allowed: 'text in UTF-8' });
  if (bytes.length > limit) {
    throw new WindrowError('sweep.file', 'a file that is too large to be meant', {
      where: file,
      found: `${bytes.length} bytes`,
      allowed: `at most ${limit} bytes`,
    });
  }
  if ((bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff)) {
    throw refuse('a file in another encoding', 'UTF-16');
  }
  const zero = bytes.indexOf(0);
  if (zero >= 0) throw refuse('a binary file', `a zero byte at offset ${zero}`);
  try {
    return new TextDecoder('utf-8', { fatal: true }).decode(bytes);
  } catch (cause) {
    throw new WindrowError('sweep.file', 'a file in another encoding', {
      where: file,
      found: 'bytes that are not UTF-8',
      allowed: 'text in UTF-8',
      cause,
    });
  }
}

/**
 * The value of a sweep file.
 * @param file its name, for messages; a name that ends in .json asks for strict JSON
 * @throws WindrowError sweep.syntax
 */
export function parseSource(text: string, file: string): Source {
  checkControls(text, file);
  checkDepth(text, file);
  const lines = new LineCounter();
  const document = parseDocument(text, { lineCounter: lines, prettyErrors: false, version: '1.2', schema: 'core' });
  const [problem] = [...document.errors, ...document.warnings];
  if (problem !== undefined) {
    const sentence = problem.code === 'MULTIPLE_DOCS' ? 'several documents in one file' : problem.message;
    throw syntax(sentence, file, lines.linePos(problem.pos[0]).line, excerpt(text, problem.pos[0]), allowedFor(problem.code));
  }
  visit(document, {
    Pair: (_, { key }) => {
      // An object cannot carry this name as a plain key, and a schema would pass over it in silence.
      if (!isScalar(key) || key.value !== '__proto__') return;
      const line = lines.linePos(key.range?.[0] ?? 0).line;
      throw new WindrowError('sweep.key', '__proto__: not a key', {
        where: file,
        line,
        key: '__proto__',
        found: '__proto__',
        allowed: 'another name',
      });
    },
  });
  if (file.endsWith('.json')) checkJson(text, file);
  return { value: valueOf(document, file), lineOf: (path) => lineOf(document.contents, path, lines) };
}

function syntax(message: string, file: string, line: number, found: string, allowed: string, cause?: unknown): WindrowError {
  const code: ErrorCode = 'sweep.syntax';
  return new WindrowError(code, message, {
    where: file,
    line,
    key: '(document)',
    found,
    allowed,
    ...(cause === undefined ? {} : { cause }),
  });
}

/** What stands at an offset: the rest of its line, cut short. */
function excerpt(text: string, offset: number): string {
  const rest = (/^[^\r\n]*/.exec(text.slice(offset))?.[0] ?? '').trim();
  return rest === '' ? 'the end of a line' : rest.length > 40 ? `${rest.slice(0, 39)}…` : rest;
}

const ALLOWED: Readonly<Record<string, string>> = {
  DUPLICATE_KEY: 'every key once',
  MULTIPLE_DOCS: 'one document',
  TAB_AS_INDENT: 'spaces as indentation',
  TAG_RESOLVE_FAILED: 'values without tags',
};
const allowedFor = (code: string): string => ALLOWED[code] ?? 'YAML 1.2 or JSON';

function checkControls(text: string, file: string): void {
  // eslint-disable-next-line no-control-regex -- control characters are what is looked for
  const at = text.search(/[\u0000-\u0008\u000b\u000c\u000e-\u001f\u007f]/);
  if (at < 0) return;
  const line = text.slice(0, at).split('\n').length;
  const found = `U+${text.charCodeAt(at).toString(16).toUpperCase().padStart(4, '0')}`;
  throw syntax('a control character', file, line, found, 'printable text');
}

/** The parser recurses into collections, its lexer does not: so the lexer measures the depth first. */
function checkDepth(text: string, file: string): void {
  let flow = 0;
  let compact = 0;
  let line = 1;
  for (const token of new Lexer().lex(text)) {
    if (token === '[' || token === '{') flow++;
    else if (token === ']' || token === '}') flow--;
    else if (token === '-' || token === '?') compact++;
    const indentation = /^ *$/.test(token) ? token.length : 0;
    if (flow > DEPTH_LIMIT || compact > DEPTH_LIMIT || indentation > 4 * DEPTH_LIMIT) {
      throw syntax('collections nested too deeply', file, line, `more than ${DEPTH_LIMIT} levels`, `at most ${DEPTH_LIMIT} levels`);
    }
    const breaks = token.split('\n').length - 1;
    if (breaks > 0) compact = 0;
    line += breaks;
  }
}

function checkJson(text: string, file: string): void {
  try {
    JSON.parse(text.replace(/^\ufeff/, ''));
  } catch (cause) {
    const message = (cause as Error).message;
    const position = /position (\d+)/.exec(message)?.[1];
    const line = position === undefined ? text.trimEnd().split('\n').length : text.slice(0, Number(position)).split('\n').length;
    throw syntax('not valid JSON', file, line, message, 'JSON, or a file name that does not end in .json', cause);
  }
}

function valueOf(document: ReturnType<typeof parseDocument>, file: string): unknown {
  try {
    const value: unknown = document.toJS({ maxAliasCount: ALIAS_LIMIT });
    if (expandedSize(value, new Map()) > VALUE_LIMIT) throw new RangeError(`more than ${VALUE_LIMIT} values when expanded`);
    return value;
  } catch (cause) {
    throw syntax(
      'aliases that cannot be resolved',
      file,
      1,
      (cause as Error).message.split('\n')[0] ?? '',
      `anchors that exist, at most ${ALIAS_LIMIT} expanded nodes`,
      cause,
    );
  }
}

/** Values below an object, shared ones counted as often as they are used; a list that contains itself never ends. */
function expandedSize(value: unknown, known: Map<object, number>): number {
  if (typeof value !== 'object' || value === null) return 1;
  const counted = known.get(value);
  if (counted !== undefined) return counted;
  known.set(value, Infinity);
  let size = 1;
  for (const inner of Object.values(value)) size += expandedSize(inner, known);
  known.set(value, size);
  return size;
}

function lineOf(root: unknown, path: KeyPath, lines: LineCounter): number {
  let node = root;
  let line = 1;
  for (const step of path) {
    const next = typeof step === 'number' ? itemOf(node, step) : pairOf(node, step);
    if (next === null) break;
    if (next.offset !== null) line = lines.linePos(next.offset).line;
    node = next.value;
  }
  return line;
}

interface Place {
  readonly offset: number | null;
  readonly value: unknown;
}

function itemOf(node: unknown, index: number): Place | null {
  if (!isSeq(node)) return null;
  const item = node.items[index] as Node | undefined;
  return item === undefined || isAlias(item) ? null : { offset: item.range?.[0] ?? null, value: item };
}

function pairOf(node: unknown, key: string): Place | null {
  if (!isMap(node)) return null;
  const pair = node.items.find((candidate: Pair) => isScalar(candidate.key) && keyText(candidate.key.value) === key);
  return pair === undefined ? null : { offset: (pair.key as Node).range?.[0] ?? null, value: pair.value };
}

/** A key as the parser turns it into a property name. */
const keyText = (value: unknown): string => (typeof value === 'string' ? value : (JSON.stringify(value) ?? ''));
