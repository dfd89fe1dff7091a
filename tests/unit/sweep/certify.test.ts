/** Exact counts in a sweep: asked for in the file, part of a point's identity, beside the count by weights where the two differ. */
import { describe, expect, it } from 'vitest';
import { parseJob } from '../../../src/queue/job-form.js';
import { certify } from '../../../src/spectral/certify.js';
import type { ModularCount } from '../../../src/spectral/modular-count.js';
import { evaluatePoint } from '../../../src/sweep/evaluate.js';
import { expandGrid } from '../../../src/sweep/grid.js';
import { documentFromJson } from '../../../src/sweep/read.js';
import type { Grid } from '../../../src/sweep/types.js';
import type { MeasuredPoint } from '../../../src/spectral/types.js';
import { sampleJob } from '../../support/jobs.js';
import { type Mapping, smallSweep } from '../../support/small-sweep.js';

const gridOf = (changes: Mapping): Grid => expandGrid(documentFromJson(smallSweep(changes)));

const ring: Mapping = { model: 'tight-binding', size: 6, coupling: 0.1, prepare: 'first', schedules: [{ family: 'exponential', mean: 1 }] };

function measured(changes: Mapping): MeasuredPoint {
  const grid = gridOf(changes);
  const { id, spec } = grid.pointAt(0);
  const { point, failure } = evaluatePoint({ id, spec, stored: null, questions: grid.questions }, { memory: 1e9 });
  expect(failure).toBeNull();
  return point!.measured;
}

describe('certify in a sweep', () => {
  it('is another point, and leaves the identity of others alone', () => {
    const plain = gridOf(ring).pointAt(0);
    const certified = gridOf({ ...ring, certify: true }).pointAt(0);
    expect(certified.id).not.toBe(plain.id);
    expect(certified.spec).toEqual({ ...plain.spec, certify: true });
    expect(gridOf({ ...ring, certify: false }).pointAt(0)).toEqual(plain);
    expect(() => gridOf({ ...ring, certify: 'yes' })).toThrow(expect.objectContaining({ code: 'sweep.value' }));
  });

  it('travels with a job', () => {
    const job = sampleJob(1);
    const points = job.points.map((point) => ({ ...point, spec: { ...point.spec, certify: true as const } }));
    expect(parseJob({ ...job, points }).points[0]?.spec.certify).toBe(true);
  });

  it('counts the levels of a ring', () => {
    expect(measured(ring).fields).toMatchObject({ accessible_dimension: 4, accessible_by: 'weights', flags: [] });
    expect(measured({ ...ring, certify: true }).fields).toMatchObject({ accessible_dimension: 4, accessible_by: 'modular', flags: [] });
  });

  it('confirms a count by structure', () => {
    const { fields } = measured({ certify: true, model: 'bose-hubbard-dimer', size: 200, coupling: 0, prepare: 'all-left' });
    expect(fields).toMatchObject({ accessible_dimension: 201, accessible_by: 'structure' });
    expect(fields.flags).not.toContain('doubtful');
  });

  it('says that a state given only in doubles cannot be counted', () => {
    const prepare = { 'ground-state': { coupling: 2 } };
    const { fields } = measured({ certify: true, model: 'xxz-chain', size: 6, coupling: 0.5, prepare });
    expect(fields.accessible_by).toBe('weights');
    expect(fields.flags).toContain('uncertified');
    expect(fields.flag_reasons.join()).toMatch(/amplitudes/);
  });
});

describe('where the counts differ', () => {
  const counted = (dimension: number, literals = 0): ModularCount => ({
    dimension,
    primes: [67108777, 67108753],
    counts: [dimension, dimension],
    literals,
    obstacle: null,
  });
  const point = measured(ring);

  it('reports the exact one, shows both and says why', () => {
    const more = certify(point, counted(6)).fields;
    expect(more).toMatchObject({ accessible_dimension: 6, accessible_by: 'modular', bright_levels: 4, flags: ['underresolved'] });
    expect(more.flag_reasons).toEqual([
      '4 levels by weights, 6 counted exactly (modulo 67108777 and 67108753): 2 are too faint or too close to another for double precision',
    ]);
    const fewer = certify(point, counted(3, 12)).fields;
    expect(fewer).toMatchObject({ accessible_dimension: 3, accessible_by: 'modular', flags: ['doubtful'] });
    expect(fewer.flag_reasons[0]).toMatch(/12 elements are no fractions and stand for their doubles\): rounding/);
  });

  it('keeps the measure and every other field', () => {
    const { fields, ...rest } = certify(point, counted(4));
    expect(rest).toEqual({ measure: point.measure, overlap: point.overlap });
    expect(fields).toEqual({ ...point.fields, accessible_by: 'modular' });
  });

  it('doubts a structure that the count contradicts', () => {
    const structural = { ...point, fields: { ...point.fields, accessible_by: 'structure' as const } };
    expect(certify(structural, counted(4)).fields).toEqual(structural.fields);
    expect(certify(structural, counted(5)).fields).toMatchObject({ accessible_dimension: 4, flags: ['doubtful'] });
  });
});
