/**
 * The tables that are declared once, held against everything that speaks of the same thing: the error catalogue against the source that
 * throws and the page that explains, the field table against the types and against what an evaluation really returns.
 */
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, expectTypeOf, it } from 'vitest';
import { CATALOGUE, type ErrorCode } from '../../../src/core/errors.js';
import { SETTINGS, settingsHelp } from '../../../src/core/settings.js';
import type { PointFields } from '../../../src/spectral/types.js';
import type { CellFields } from '../../../src/statistics/types.js';
import { evaluatePoint } from '../../../src/sweep/evaluate.js';
import { CELL_FIELDS, FLAG_FIELDS, POINT_FIELDS } from '../../../src/sweep/fields.js';
import { expandGrid } from '../../../src/sweep/grid.js';
import { normalise } from '../../../src/sweep/document.js';
import { smallSweep } from '../../support/small-sweep.js';

const root = fileURLToPath(new URL('../../..', import.meta.url));
const codes = Object.keys(CATALOGUE) as ErrorCode[];

function sourcesBelow(folder: string): string[] {
  return readdirSync(join(root, folder), { withFileTypes: true }).flatMap((entry) => {
    const path = join(folder, entry.name);
    if (entry.isDirectory()) return sourcesBelow(path);
    return entry.name.endsWith('.ts') && path !== join('src', 'core', 'errors.ts') ? [path] : [];
  });
}

describe('the error catalogue', () => {
  const source = [...sourcesBelow('src'), ...sourcesBelow('workers')].map((path) => readFileSync(join(root, path), 'utf8')).join('\n');

  it.each(codes)('%s is used by the program', (code) => {
    expect(source.includes(`'${code}'`)).toBe(true);
  });

  it.each(codes)('%s says in a few words what it is, and ends a command with status 1 or 2', (code) => {
    const { summary, exit, retryable } = CATALOGUE[code];
    expect(summary).toMatch(/^[a-z].{10,100}[^.]$/);
    expect([1, 2]).toContain(exit);
    // What the user wrote does not get better by itself.
    expect(exit === 2 && retryable).toBe(false);
  });

  it('is the table of DEVELOPERS.md', () => {
    const page = readFileSync(join(root, 'DEVELOPERS.md'), 'utf8');
    const documented = page.split('\n').filter((line) => /^\| `[a-z]+\.[a-z-]+` \| [12] \|/.test(line));
    const declared = codes.map((code) => {
      const { summary, exit, retryable } = CATALOGUE[code];
      return `| \`${code}\` | ${String(exit)} | ${retryable ? 'yes' : ''} | ${summary} |`;
    });
    expect(documented).toEqual(declared);
  });
});

describe('the settings', () => {
  it.each(Object.values(SETTINGS))('$env is in the help', ({ env, description }) => {
    expect(settingsHelp()).toContain(env);
    expect(settingsHelp()).toContain(description);
  });

  it('have names of their own', () => {
    const names = Object.values(SETTINGS).map(({ env }) => env);
    expect(new Set(names).size).toBe(names.length);
  });
});

describe('the field table', () => {
  const fields = { point: [...POINT_FIELDS, ...FLAG_FIELDS], cell: [...CELL_FIELDS, ...FLAG_FIELDS] };

  it('declares every field of the types', () => {
    expectTypeOf<Exclude<keyof PointFields, (typeof fields.point)[number]['name']>>().toBeNever();
    expectTypeOf<Exclude<keyof CellFields, (typeof fields.cell)[number]['name']>>().toBeNever();
  });

  it('declares exactly what an evaluation returns, with its types', () => {
    const grid = expandGrid(normalise(smallSweep({ sampling: { draws: 4, seed: 1 } })));
    const { id, spec } = grid.pointAt(0);
    const outcome = evaluatePoint({ id, spec, stored: null, questions: grid.questions }, { memory: 2 ** 30 });
    expect(outcome.failure).toBeNull();
    const records = [
      [fields.point, [outcome.point!.measured.fields]],
      [fields.cell, outcome.cells.map((cell) => cell.fields)],
    ] as const;
    for (const [declared, rows] of records) {
      for (const row of rows) {
        expect(Object.keys(row).sort()).toEqual(declared.map(({ name }) => name).sort());
        for (const { name, type, nullable } of declared) {
          const value: unknown = row[name as keyof typeof row];
          if (value === null) expect(nullable, name).toBe(true);
          else if (type === 'list') expect(Array.isArray(value), name).toBe(true);
          else if (type === 'integer') expect(Number.isInteger(value), name).toBe(true);
          else expect(typeof value, name).toBe(type === 'float' ? 'number' : 'string');
        }
      }
    }
  });

  it('says what every field means, once', () => {
    for (const declared of Object.values(fields)) {
      expect(new Set(declared.map(({ name }) => name)).size).toBe(declared.length);
      for (const { meaning } of declared) expect(meaning.length).toBeGreaterThan(4);
    }
  });
});
