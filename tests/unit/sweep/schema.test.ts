/** The JSON Schema of sweep files, held by a general-purpose validator (draft 2020-12), and the examples. */
import { readFileSync, readdirSync } from 'node:fs';
import { Ajv2020 } from 'ajv/dist/2020.js';
import { describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { modelFamilies } from '../../../src/models/registry.js';
import { scheduleFamilies } from '../../../src/schedules/registry.js';
import { estimateSweep } from '../../../src/sweep/estimate.js';
import { expandGrid } from '../../../src/sweep/grid.js';
import { readSweepFile } from '../../../src/sweep/read-file.js';
import { documentFromJson } from '../../../src/sweep/read.js';
import { sweepJsonSchema } from '../../../src/sweep/schema.js';
import { smallSweep, type Mapping } from '../../support/small-sweep.js';

const folder = new URL('../../../examples/', import.meta.url);
const examples = readdirSync(folder).filter((name) => name.endsWith('.yaml'));

const schema = sweepJsonSchema();
const validate = new Ajv2020({ strict: false, allErrors: false }).compile(schema);

describe('JSON Schema', () => {
  it.each(examples)('accepts %s', (name) => {
    expect(validate(parse(readFileSync(new URL(name, folder), 'utf8')))).toBe(true);
  });

  it('accepts a normalised document', () => {
    expect(validate(documentFromJson(smallSweep({ sampling: { draws: 5 } })))).toBe(true);
  });

  const wrong: readonly (readonly [string, Mapping])[] = [
    ['an unknown key', { colour: 'red' }],
    ['an unknown model', { model: 'dimer' }],
    ['an unknown parameter', { parameters: { K: 1 } }],
    ['an unknown scale', { coupling: { values: [1], as: 'U/J' } }],
    ['an unknown schedule', { schedules: [{ family: 'sometimes' }] }],
    ['a schedule without its mean', { schedules: [{ family: 'exponential' }] }],
    ['a parameter of another schedule', { schedules: [{ family: 'exponential', mean: 1, shape: 2 }] }],
    ['a text for a number', { budget: '100' }],
    ['a fraction of a boson', { size: 2.5 }],
    ['an empty axis', { coupling: [] }],
    ['a count of nothing', { coupling: { from: 0, to: 1, count: 0 } }],
    ['a state of no kind', { prepare: { momentum: 1 } }],
    ['an efficiency above 1', { detector: { efficiency: 1.1 } }],
    ['dark counts', { detector: { 'dark-counts': 0.1 } }],
    ['disorder where there is none', { disorder: { strength: 1 } }],
  ];
  it.each(wrong)('rejects %s, as the reader does', (_, changes) => {
    const sweep = smallSweep(changes);
    expect(validate(sweep)).toBe(false);
    expect(() => documentFromJson(sweep)).toThrow();
  });

  it('describes every model, schedule and parameter', () => {
    const text = JSON.stringify(schema);
    for (const name of [...modelFamilies.keys(), ...scheduleFamilies.keys()]) expect(text).toContain(`"const":"${name}"`);
    const undescribed = Object.entries((schema['oneOf'] as { properties: Record<string, object> }[])[0]?.properties ?? {}).filter(
      ([key, value]) => !('$ref' in value) && !('description' in value) && key !== 'detector',
    );
    expect(undescribed).toEqual([]);
  });
});

describe('examples', () => {
  it.each(examples)('%s is read, and finished by one machine in minutes', (name) => {
    const document = readSweepFile(new URL(name, folder).pathname);
    expect(`${document.name}.yaml`).toBe(name);
    const estimate = estimateSweep(expandGrid(document), { threads: 2 });
    expect(estimate.cells).toBeGreaterThan(0);
    expect(estimate.seconds).toBeLessThan(600);
  });

  it('has the demonstration: 600 points, 1800 cells', () => {
    const { points, cells } = expandGrid(readSweepFile(new URL('double-well.yaml', folder).pathname));
    expect([points, cells]).toEqual([600, 1800]);
  });
});
