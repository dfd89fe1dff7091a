/**
 * Wrong sweep files: each gives exactly one error that names the line, the key, what was found and what is allowed, with exit status
 * 2, before anything starts. What is right and what is wrong is defined by the sweep file format (README), not by the reader.
 */
import { describe, expect, it } from 'vitest';
import { WindrowError, type ErrorCode } from '../../../src/core/errors.js';
import { readSweep } from '../../../src/sweep/read.js';

const LINES = {
  name: 'wrong',
  model: 'bose-hubbard-dimer',
  size: '{ from: 4, to: 8, step: 2 }',
  coupling: '[0.5, 1]',
  parameters: '{ J: 1 }',
  prepare: 'all-left',
  detect: 'same',
  schedules: '[{ family: exponential, mean: 0.5 }, { family: fixed, interval: 0.37 }]',
  resolution: '{ energy: auto }',
  budget: '100',
};

type Key = keyof typeof LINES;
const KEYS = Object.keys(LINES) as Key[];

/** A right file of one line a key, with some keys replaced, left out (null) or added. */
function file(changes: Record<string, string | null>): string {
  const lines = KEYS.filter((key) => changes[key] !== null).map((key) => `${key}: ${changes[key] ?? LINES[key]}`);
  const added = Object.entries(changes).filter(([key]) => !Object.hasOwn(LINES, key));
  return [...lines, ...added.map(([key, value]) => `${key}: ${value}`)].join('\n');
}

const lineOf = (key: Key): number => KEYS.indexOf(key) + 1;
const ADDED = KEYS.length + 1;

function errorOf(source: string | Uint8Array, name: string): WindrowError {
  try {
    readSweep(source, { file: name });
  } catch (error) {
    if (error instanceof WindrowError) return error;
    throw error;
  }
  throw new Error('the file was accepted');
}

interface Case {
  readonly title: string;
  readonly source: string | Uint8Array;
  readonly code: ErrorCode;
  readonly line?: number;
  readonly key?: string;
  readonly found?: string | RegExp;
  readonly allowed?: string | RegExp;
  readonly name?: string;
}

/** One changed key. */
const one = (
  key: Key,
  value: string,
  code: ErrorCode,
  path: string,
  found: Case['found'],
  allowed: Case['allowed'],
  title = value,
): Case => ({
  title: `${key}: ${title}`,
  source: file({ [key]: value }),
  code,
  line: lineOf(key),
  key: path,
  ...(found === undefined ? {} : { found }),
  ...(allowed === undefined ? {} : { allowed }),
});

const V: ErrorCode = 'sweep.value';
const K: ErrorCode = 'sweep.key';

const form: readonly Case[] = [
  one('size', 'four', V, 'size', '"four"', /a whole number.*list.*from, to/),
  one('size', '4.5', V, 'size', '4.5', /whole number/),
  one('size', '[4, 5.5]', V, 'size[1]', '5.5', /whole number/),
  one('size', '[4, 6, 4]', V, 'size[2]', '4', /once/),
  one('size', '[]', V, 'size', '[]', /at least 1/),
  one('size', '0', V, 'size', '0', /at least 1/),
  one('size', '{ from: 8, to: 4, step: 2 }', V, 'size.to', 'from 8 to 4', /≥ 8/),
  one('size', '{ from: 4, to: 9, step: 2 }', V, 'size.step', /last value 8/, /reaches 9/),
  one('size', '{ from: 4, to: 8, step: 0 }', V, 'size.step', '0', /above 0/),
  one('size', '{ from: 4, to: 8, step: -2 }', V, 'size.step', '-2', /above 0/),
  one('size', '{ from: 4, to: 8 }', V, 'size', 'neither', /count, step/),
  one('size', '{ from: 4, to: 8, step: 2, count: 3 }', V, 'size', 'both', /count, step/),
  one('size', '{ from: 4, to: 8, count: 0 }', V, 'size.count', '0', /at least 1/),
  one('size', '{ from: 4, to: 8, count: 1 }', V, 'size.count', '1', /at least 2/),
  one('size', '{ from: 4, to: 8, count: 4 }', V, 'size', /5\.33/, /whole number/),
  one('size', '{ from: 4, to: 8, setp: 2 }', K, 'size.setp', 'setp', /step/),
  one('size', '{ from: 4, count: 3 }', K, 'size.to', 'nothing', /number/),
  one('size', '{ from: 1, to: 1000000000, step: 1 }', V, 'size.step', /1000000000 values/, /1000000/),
  one('coupling', '.nan', V, 'coupling', 'NaN', /number/),
  one('coupling', '[0.5, .inf]', V, 'coupling[1]', 'Infinity', /number/),
  one('coupling', '1e999', V, 'coupling', 'Infinity', /number/),
  one('coupling', '"0.5"', V, 'coupling', '"0.5"', /a number/),
  one('coupling', '{ from: 0, to: 6, count: 4, spacing: log }', V, 'coupling.from', '0', /above 0/),
  one('coupling', '{ from: 1, to: 6, step: 1, spacing: log }', V, 'coupling.step', '1', /count/),
  one('coupling', '{ from: 1, to: 6, count: 3, spacing: cubic }', V, 'coupling.spacing', '"cubic"', 'linear, log'),
  one('coupling', '{ from: 1, to: 6, count: 3, as: interaction-ration }', V, 'coupling.as', '"interaction-ration"', /U, interaction-ratio/),
  one('coupling', '{ values: [1], count: 3 }', K, 'coupling.count', 'count', /values/),
  one('coupling', '', V, 'coupling', 'nothing', /a number/, '(empty)'),
  one('parameters', '{ J: 1, tlit: 0 }', K, 'parameters.tlit', 'tlit', 'J, tilt'),
  one('parameters', '{ J: strong }', V, 'parameters.J', '"strong"', /a number/),
  one('parameters', '[1]', V, 'parameters', '[1]', /mapping/),
  one('prepare', '{ occupation: 4 }', V, 'prepare.occupation', '4', /list/),
  one('prepare', '{ superposition: [[0.6, all-left], [0.8]] }', V, 'prepare.superposition[1]', '[0.8]', /two|2/),
  one('prepare', '{ sites: 2 }', K, 'prepare.sites', 'sites', /site/),
  one('schedules', '[]', V, 'schedules', '[]', /at least 1/),
  one('schedules', '[{ mean: 0.5 }]', K, 'schedules[0].family', 'nothing', /exponential/),
  one('schedules', '[{ family: exponental, mean: 1 }]', 'schedule.unknown', 'schedules[0].family', '"exponental"', /exponential/),
  one('schedules', '[{ family: exponential }]', K, 'schedules[0].mean', 'nothing', undefined),
  one('schedules', '[{ family: exponential, maen: 1 }]', K, 'schedules[0].maen', 'maen', /mean/),
  one('schedules', '[{ family: exponential, mean: -1 }]', V, 'schedules[0].mean', '-1', /above 0/),
  one('schedules', '[{ family: exponential, mean: [1, 0] }]', V, 'schedules[0].mean[1]', '0', /above 0/),
  one('schedules', '[{ family: gamma, mean: 1, shape: 2, dead-time: -0.1 }]', V, 'schedules[0].dead-time', '-0.1', /at least 0/),
  one('schedules', '[{ family: empirical }]', K, 'schedules[0].intervals', 'nothing', /file/),
  one('schedules', '[{ family: empirical, intervals: [] }]', V, 'schedules[0].intervals', '[]', /at least 1/),
  one('schedules', '[{ family: empirical, file: a.txt, intervals: [1] }]', K, 'schedules[0].file', 'file and intervals', /one of/),
  one('resolution', '{ enregy: auto }', K, 'resolution.enregy', 'enregy', 'energy, weight'),
  one('resolution', '{ energy: fine }', V, 'resolution.energy', '"fine"', /auto/),
  one('resolution', '{ weight: 1 }', V, 'resolution.weight', '1', /auto|below 1/),
  one('budget', '0', V, 'budget', '0', /at least 1/),
  one('budget', '2.5', V, 'budget', '2.5', /whole/),
  one('name', 'two words', V, 'name', '"two words"', /letters/),
];

const meaning: readonly Case[] = [
  one('model', 'bose-hubbard-dimmer', 'model.unknown', 'model', '"bose-hubbard-dimmer"', /bose-hubbard-dimer/),
  one('prepare', '{ occupation: [4, 0] }', 'state.invalid', 'prepare.occupation', '[4,0]', undefined),
  one('prepare', '{ occupation: [2, 0, 2] }', 'state.invalid', 'prepare.occupation', '[2,0,2]', undefined),
  one('prepare', 'all-lift', 'state.unknown', 'prepare', '"all-lift"', /all-left/),
  one('prepare', '[all-left, all-up]', 'state.unknown', 'prepare[1]', '"all-up"', /all-right/),
  one('detect', '{ site: 7 }', 'state.invalid', 'detect.site', undefined, undefined),
  one('size', '[4, 2000000]', 'model.size', 'size', '2000000', /1 to 1000000/),
  {
    title: 'a scaled coupling without tunnelling',
    source: file({ coupling: '{ values: [0.5, 1], as: interaction-ratio }', parameters: '{ J: [1, 0] }' }),
    code: 'model.coupling',
    line: lineOf('parameters'),
    key: 'parameters.J',
    found: '0',
    allowed: /J ≠ 0/,
  },
  one('schedules', '[{ family: uniform, low: 2, high: 1 }]', 'schedule.parameter', 'schedules[0].high', '1', undefined),
  one('schedules', '[{ family: uniform, low: [0, 2], high: 1 }]', 'schedule.parameter', 'schedules[0].high', '1', undefined),
  one('schedules', '[{ family: fixed, interval: 1 }, { family: fixed, interval: [2, 1] }]', V, 'schedules[1]', /fixed/, /once/),
  one('coupling', '{ from: 0, to: 1, count: 1000000 }', 'sweep.too-large', 'coupling', /6000000 cells/, /2000000 cells/),
];

const added: readonly Case[] = [
  ['precision', 'quad', K, 'precision', 'precision', /name, model/],
  ['colour', 'red', K, 'colour', 'colour', /name, model/],
  ['scheduels', '[]', K, 'scheduels', 'scheduels', /schedules/],
  ['disorder', '{ strength: 1 }', 'model.parameter', 'disorder', undefined, /tight-binding/],
  ['detector', '{ efficiency: 0 }', V, 'detector.efficiency', '0', /above 0/],
  ['detector', '{ efficiency: 1.5 }', V, 'detector.efficiency', '1.5', /at most 1/],
  ['detector', '{ dark-counts: 0.01 }', V, 'detector.dark-counts', '0.01', '0'],
  ['sampling', '{ draws: 0 }', V, 'sampling.draws', '0', /at least/],
  ['sampling', '{ seed: 3 }', K, 'sampling.draws', 'nothing', /number/],
  ['sampling', '{ draws: 10, seed: 12345678901234567890 }', V, 'sampling.seed', /^123/, undefined],
  ['<<', '{ budget: 3 }', K, '<<', '<<', /budget/],
  ['__proto__', '{ budget: 3 }', K, '__proto__', '__proto__', /name/],
].map(([key, value, code, path, found, allowed]) => ({
  title: `${String(key)}: ${String(value)}`,
  source: file({ [key as string]: value as string }),
  code: code as ErrorCode,
  line: ADDED,
  key: path as string,
  ...(found === undefined ? {} : { found: found }),
  ...(allowed === undefined ? {} : { allowed: allowed }),
}));

const typos: readonly Case[] = [
  {
    title: 'a mistyped key in place of a needed one',
    source: file({ budget: null, budgte: '100' }),
    code: K,
    line: KEYS.length,
    key: 'budgte',
    found: 'budgte',
    allowed: /budget/,
  },
  one('prepare', '{ sit: 2 }', K, 'prepare.sit', 'sit', /site/),
  one('prepare', '{ momentum: 2 }', V, 'prepare', '{"momentum":2}', /occupation.*site.*superposition/),
];

const missing: readonly Case[] = (['name', 'model', 'size', 'coupling', 'prepare', 'schedules', 'budget'] as const).map((key) => ({
  title: `${key} is missing`,
  source: file({ [key]: null }),
  code: K,
  line: 1,
  key,
  found: 'nothing',
}));

const bytes = (...parts: (string | number[])[]): Uint8Array =>
  Uint8Array.from(parts.flatMap((part) => (typeof part === 'string' ? [...new TextEncoder().encode(part)] : part)));

const S: ErrorCode = 'sweep.syntax';
const F: ErrorCode = 'sweep.file';
/** 'billion laughs': ten aliases of ten aliases of … */
const bomb = [
  'a: &a [x, x, x, x, x, x, x, x, x, x]',
  ...['b', 'c', 'd', 'e', 'f', 'g', 'h'].map((key, i) => `${key}: &${key} [${`*${'abcdefgh'[i]}, `.repeat(9)}]`),
].join('\n');

const texts: readonly Case[] = [
  { title: 'an empty file', source: '', code: V, line: 1, found: 'nothing', allowed: /mapping/ },
  { title: 'only comments', source: '# nothing\n', code: V, line: 1, found: 'nothing', allowed: /mapping/ },
  { title: 'a list', source: '- a\n- b\n', code: V, line: 1, found: 'a list', allowed: /mapping/ },
  { title: 'a sentence', source: 'hello\n', code: V, line: 1, found: '"hello"', allowed: /mapping/ },
  { title: 'a duplicate key', source: `${file({})}\nbudget: 3\n`, code: S, line: ADDED, allowed: /once/ },
  { title: 'two documents', source: `${file({})}\n---\n${file({})}`, code: S, line: ADDED, allowed: /one document/ },
  { title: 'a tab as indentation', source: 'name: a\nresolution:\n\tenergy: 1\n', code: S, line: 3, allowed: /spaces/ },
  { title: 'an unclosed list', source: file({ coupling: '[1, 2' }), code: S, line: lineOf('parameters'), allowed: /YAML/ },
  { title: 'an unclosed quote', source: 'name: "a\n', code: S, allowed: /YAML/ },
  { title: 'a tag', source: file({ budget: '!big 100' }), code: S, line: lineOf('budget'), allowed: /tags/ },
  { title: 'an alias that is not defined', source: file({ budget: '*k' }), code: S, allowed: /anchors/ },
  { title: 'an alias of itself', source: file({ coupling: '&c [*c]' }), code: S, allowed: /anchors/ },
  { title: 'an alias bomb', source: bomb, code: S, allowed: /anchors/ },
  {
    title: 'a long list used often',
    source: `a: &a [${'1, '.repeat(50_000)}1]\nb: [${'*a, '.repeat(60)}]`,
    code: S,
    found: /2000000 values/,
  },
  { title: 'deep nesting', source: `name: ${'['.repeat(100_000)}`, code: S, line: 1, allowed: /64/ },
  { title: 'deep nesting of list marks', source: `name:\n  ${'- '.repeat(100_000)}x`, code: S, line: 2, allowed: /64/ },
  { title: 'a control character', source: 'name: a\nmodel: \u0007\n', code: S, line: 2, found: 'U+0007' },
  { title: 'a trailing comma in .json', source: '{\n  "name": "a",\n}', code: S, line: 3, name: 'a.json', allowed: /JSON/ },
  { title: 'a comment in .json', source: '{"name": "a" # here\n}', code: S, line: 1, name: 'a.json', allowed: /JSON/ },
  {
    title: 'a binary file',
    source: bytes([0x7f, 0x45, 0x4c, 0x46, 2, 1, 1, 0, 0, 0]),
    code: F,
    found: /zero byte at offset 7/,
    allowed: /UTF-8/,
  },
  { title: 'a picture', source: bytes([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a, 0xff]), code: F, allowed: /UTF-8/ },
  { title: 'UTF-16', source: bytes([0xff, 0xfe], [0x6e, 0, 0x61, 0]), code: F, found: 'UTF-16', allowed: /UTF-8/ },
  { title: 'Latin-1', source: bytes('name: a # caf', [0xe9], '\n'), code: F, found: /not UTF-8/, allowed: /UTF-8/ },
  { title: 'a huge file', source: new Uint8Array(5 * 1024 * 1024).fill(0x20), code: F, found: '5242880 bytes', allowed: /4194304/ },
];

/** What `found` and `allowed` say is text for people: a string must be equal, an expression must match. */
function expectText(actual: string | undefined, expected: string | RegExp | undefined): void {
  expect(actual).toBeTruthy();
  if (typeof expected === 'string') expect(actual).toBe(expected);
  else if (expected !== undefined) expect(actual).toMatch(expected);
}

describe('wrong sweep files', () => {
  it('starts from a file that is right', () => {
    expect(readSweep(file({})).name).toBe('wrong');
  });

  it.each([...form, ...meaning, ...added, ...typos, ...missing, ...texts])(
    '$title',
    ({ source, code, line, key, found, allowed, name = 'wrong.yaml' }) => {
      const error = errorOf(source, name);
      const { details } = error;
      expect(error.code).toBe(code);
      expect(error.exit).toBe(2);
      expect(details.where).toBe(name);
      if (line !== undefined) expect(details.line).toBe(line);
      if (code !== 'sweep.file') expect(details.line).toBeGreaterThan(0);
      if (key !== undefined) {
        expect(details.key).toBe(key);
        expect(error.message).toContain(key);
      }
      expectText(details.found, found);
      expectText(details.allowed, allowed);
      expect(error.message).not.toContain('\n');
    },
  );
});

describe('grids too large to be checked point by point', () => {
  it('are checked along every axis', () => {
    const sizes = [...Array.from({ length: 150 }, (_, i) => 2 * i + 2), 31, ...Array.from({ length: 50 }, (_, i) => 2 * i + 400)];
    const source = file({
      size: JSON.stringify(sizes),
      parameters: '{ tilt: { from: 0, to: 1, count: 200 } }',
      prepare: 'balanced',
    });
    const { code, details } = errorOf(source, 'wrong.yaml');
    expect([code, details.key, details.line]).toEqual(['state.invalid', 'prepare', lineOf('prepare')]);
  });
});
