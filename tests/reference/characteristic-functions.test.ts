/**
 * Characteristic functions against their closed forms (common practice) and 30-digit quadrature, and the Faddeeva function against
 * 40-digit values (fixtures/complex-error-function.py). Values at x = 1.3 are those of E exp(+i x τ), the conjugate of χ.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { faddeeva } from '../../src/schedules/faddeeva.js';
import { buildSchedule } from '../../src/schedules/registry.js';
import type { ScheduleSpec } from '../../src/schedules/types.js';

const fixture = JSON.parse(readFileSync(new URL('fixtures/complex-error-function.json', import.meta.url), 'utf8')) as {
  readonly faddeeva: readonly [number, number, number, number][];
  readonly truncated_normal: readonly [number, number, number, number, number][];
};

const distance = (out: Float64Array, re: number, im: number): number => Math.hypot(out[0] - re, out[1] - im) / Math.hypot(re, im);

describe('characteristic functions at x = 1.3', () => {
  const mean = (m: number): ScheduleSpec => ({ family: 'exponential', mean: m });
  it.each<[string, ScheduleSpec, number, number]>([
    ['exponential', mean(0.7), 0.5470160275696078, 0.4977845850883431],
    ['gamma', { family: 'gamma', mean: 1, shape: 2.5 }, 0.269495819394826, 0.6907251114710188],
    ['uniform', { family: 'uniform', low: 0.2, high: 1.5 }, 0.3975616349773457, 0.7908703014708877],
    ['truncated normal', { family: 'truncated-normal', location: 0.8, scale: 0.6 }, 0.3213268169393197, 0.733304213236972],
    ['half normal', { family: 'truncated-normal', location: 0, scale: 0.6 }, 0.737713309033535, 0.510245607219912],
    ['two-point', { family: 'two-point', first: 0.5, second: 1.7, weight: 0.3 }, -0.1787644256491952, 0.7433556680935349],
    ['inverse Gaussian', { family: 'inverse-gaussian', mean: 1, shape: 2 }, 0.3157556066000293, 0.6718958233384165],
    ['fixed', { family: 'fixed', interval: 0.7 }, Math.cos(0.91), Math.sin(0.91)],
    [
      'delayed exponential',
      { family: 'exponential', mean: 0.7, 'dead-time': 0.4 },
      ...rotated(0.5470160275696078, 0.4977845850883431, 0.52),
    ],
    ['empirical', { family: 'empirical', intervals: [1.7, 0.5, 1.7] }, ...mixed(1 / 3, 0.5, 1.7)],
  ])('%s', (_, spec, re, im) => {
    const out = new Float64Array(2);
    buildSchedule(spec).complement(1.3, out);
    // The reference values have 16 digits; a few roundings of the evaluation besides.
    expect(Math.hypot(1 - out[0] - re, -out[1] + im)).toBeLessThan(1e-15);
  });
});

function rotated(re: number, im: number, angle: number): [number, number] {
  return [re * Math.cos(angle) - im * Math.sin(angle), re * Math.sin(angle) + im * Math.cos(angle)];
}
function mixed(weight: number, a: number, b: number): [number, number] {
  const at = (f: (x: number) => number): number => weight * f(1.3 * a) + (1 - weight) * f(1.3 * b);
  return [at(Math.cos), at(Math.sin)];
}

describe('Faddeeva function', () => {
  it.each(fixture.faddeeva)('w(%f + %f i)', (x, y, re, im) => {
    const out = new Float64Array(2);
    faddeeva(x, y, out);
    expect(distance(out, re, im)).toBeLessThan(3e-15);
  });
});

describe('truncated normal, relative error of 1 − χ', () => {
  it.each(fixture.truncated_normal)('location %f, scale %f, x = %f', (location, scale, x, re, im) => {
    const out = new Float64Array(2);
    buildSchedule({ family: 'truncated-normal', location, scale }).complement(x, out);
    // Near 2π/location the argument's own rounding, 1e-16 of 2π, is 1e-11 of 1 − χ = 2e-5.
    expect(distance(out, re, im)).toBeLessThan(location === 1 ? 5e-11 : 5e-15);
  });
});
