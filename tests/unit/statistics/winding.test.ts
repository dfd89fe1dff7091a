/** Covering of levels by windows, on the line and on the circle, against counts done by hand. */
import { describe, expect, it } from 'vitest';
import { buildSchedule } from '../../../src/schedules/registry.js';
import { coverLevels, windingNumber } from '../../../src/statistics/winding.js';
import { measureOf } from '../../support/reference-measure.js';

const random = buildSchedule({ family: 'exponential', mean: 1 });
const levels = (energies: readonly number[], weights?: readonly number[]) =>
  measureOf(energies.map((energy, k) => ({ energy, weight: weights?.[k] ?? 1 / energies.length })));

describe('on the energy axis', () => {
  it.each([
    [0.05, 4, [0, 1, 2, 3]],
    [0.1, 3, [0, 0, 1, 2]],
    [0.25, 2, [0, 0, 0, 1]],
    [0.95, 2, [0, 0, 0, 1]],
    [1, 1, [0, 0, 0, 0]],
  ])('windows of width %f', (width, count, windowOf) => {
    const windows = coverLevels(levels([0, 0.1, 0.25, 1]), random, width);
    expect(windows.count).toBe(count);
    expect([...windows.windowOf]).toEqual(windowOf);
  });
  it('a window opens at the lowest level not covered', () => {
    // 0–1 holds two, 1.5–2.5 two; a window from 1 would have held three.
    expect([...coverLevels(levels([0, 1, 1.5, 2]), random, 1).windowOf]).toEqual([0, 0, 1, 1]);
  });
  it('windows below the weight are dropped, one that equals it counts', () => {
    const measure = levels([0, 1, 2], [0.7, 0.2, 0.1]);
    const windows = coverLevels(measure, random, 0.1);
    expect([0.05, 0.1, 0.15, 0.2, 0.5, 0.9].map((weight) => windingNumber(measure, windows, weight))).toEqual([3, 3, 2, 2, 1, 0]);
    const tenths = levels(Array.from({ length: 10 }, (_, k) => k));
    const pairs = coverLevels(tenths, random, 1);
    expect(windingNumber(tenths, pairs, 0.2)).toBe(5);
  });
  it('one level is one window', () => {
    const measure = levels([3]);
    expect(windingNumber(measure, coverLevels(measure, random, 0), 1)).toBe(1);
  });
});

describe('on the circle of phases', () => {
  const fixed = buildSchedule({ family: 'fixed', interval: 2 });
  it('starts after the widest gap, across 0', () => {
    // Phases −0.1, 0.1, 3: the widest gap ends at 6.18, so −0.1 and 0.1 share a window.
    const measure = levels([-0.05, 0.05, 1.5]);
    expect(coverLevels(measure, fixed, 0.1).count).toBe(2);
    expect(coverLevels(measure, fixed, 0.09).count).toBe(3);
  });
  it('levels a period apart share a phase', () => {
    expect(coverLevels(levels([0, Math.PI, 2 * Math.PI, 4]), fixed, 1e-9).count).toBe(2);
  });
  it('a window as wide as the circle holds everything', () => {
    expect(coverLevels(levels([0, 0.7, 1.1, 2.9]), fixed, Math.PI).count).toBe(1);
  });
  it('windows get more as they get narrower', () => {
    const measure = levels([0, 0.3, 0.31, 0.9, 1.4, 1.41]);
    const counts = [2, 0.5, 0.2, 0.02, 0.005].map((width) => coverLevels(measure, fixed, width).count);
    expect(counts).toEqual([...counts].sort((a, b) => a - b));
    expect(counts[4]).toBe(6);
  });
});
