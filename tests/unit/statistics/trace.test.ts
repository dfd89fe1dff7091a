/** Time series of one measure, held against closed forms of two levels and against identities. */
import { describe, expect, it } from 'vitest';
import type { MeasuredPoint, SpectralMeasure } from '../../../src/spectral/types.js';
import { traceMeasure } from '../../../src/statistics/trace.js';
import type { Question } from '../../../src/statistics/types.js';
import { PLAIN_POINT, TWO_LEVEL_QUESTION } from '../../support/two-level-rows.js';

const measured = (energies: number[], weights: number[], overlapRe = weights): MeasuredPoint => {
  const measure: SpectralMeasure = {
    energies: Float64Array.from(energies),
    weights: Float64Array.from(weights),
    overlapRe: Float64Array.from(overlapRe),
    overlapIm: null,
  };
  return { measure, fields: PLAIN_POINT, overlap: [overlapRe.reduce((sum, q) => sum + q, 0), 0] };
};
const options = { length: 30, correlations: 6, draw: { seed: 1, number: 0 } };
const ask = (schedule: Question['schedule'], changes: Partial<Question> = {}): Question => ({
  ...TWO_LEVEL_QUESTION,
  schedule,
  ...changes,
});

/** H = −g σx, prepared and detected in |left>: levels ±g with weights 1/2. */
const twoLevel = (g: number): MeasuredPoint => measured([-g, g], [0.5, 0.5]);

describe('a trace', () => {
  it('of two levels at a fixed interval: F_1 = cos²gτ, F_n = sin⁴gτ cos^{2(n−2)}gτ, S_n = sin²gτ cos^{2(n−1)}gτ', () => {
    // Elementary, as in Quantum renewal equation for the first detection time of a quantum walk, J. Phys. A 50, 04LT01 (2017),
    // DOI 10.1088/1751-8121/aa5191, for two sites (from memory). Rounding of 30 steps: 1e-13.
    const { detection, survival, transition, time } = traceMeasure(twoLevel(1), ask({ family: 'fixed', interval: 0.3 }), options);
    const [c, s] = [Math.cos(0.3) ** 2, Math.sin(0.3) ** 2];
    expect(detection[0]).toBe(0);
    expect(survival[0]).toBe(1);
    for (let n = 1; n <= 30; n++) {
      expect(detection[n]).toBeCloseTo(n === 1 ? c : s * s * c ** (n - 2), 13);
      expect(survival[n]).toBeCloseTo(s * c ** (n - 1), 13);
      expect(transition[n]).toBeCloseTo(Math.cos(0.3 * n) ** 2, 13);
      expect(time[n]).toBeCloseTo(0.3 * n, 13);
    }
  });

  it('of two levels at random times: <|u|²> = (1 + Re χ(2g)^k)/2 around the level 1/2, and its correlations', () => {
    // Exponential intervals of mean m: χ(x) = 1/(1 + i x m). C_kl = Σ_ij q_i q_j* χ(E_i − E_j)^l χ(E_i)^(k−l).
    const [g, m] = [0.7, 0.5];
    const { transition, recurrentWeight, correlation } = traceMeasure(twoLevel(g), ask({ family: 'exponential', mean: m }), options);
    const power = (x: number, k: number) => ({ size: (1 + x * x * m * m) ** (-k / 2), angle: -k * Math.atan(x * m) });
    for (let k = 0; k <= 30; k++) {
      const chi = power(2 * g, k);
      expect(transition[k]).toBeCloseTo((1 + chi.size * Math.cos(chi.angle)) / 2, 13);
    }
    expect(recurrentWeight).toBe(0.5);
    expect(correlation.size).toBe(6);
    for (let k = 0; k < 6; k++) {
      expect(correlation.re[k * 6 + k]).toBeCloseTo(transition[k], 13);
      // l = 0: Σ_i q_i χ(E_i)^k, real for levels ±g.
      const chi = power(g, k);
      expect(correlation.re[k * 6]).toBeCloseTo(chi.size * Math.cos(chi.angle), 13);
      expect(correlation.im[k * 6]).toBeCloseTo(0, 13);
    }
  });

  it('has a winding phase that grows and ends at 2π times the number of distinct phases', () => {
    // Recurrence for discrete time unitary evolutions, Commun. Math. Phys. 320, 543 (2013), DOI 10.1007/s00220-012-1645-2: f̂ of the return
    // is a finite Blaschke product, whose phase grows and winds as often as there are distinct exp(−iE_jτ).
    for (const [point, interval, winding] of [
      [twoLevel(1), 0.3, 2],
      [measured([-1, 0, 1, 2.5], [0.1, 0.2, 0.3, 0.4]), 0.7, 4],
      [measured([-1, 0, 1, 2.5], [1e-12, 0.4, 0.2, 0.4]), 0.7, 4],
      // −1 and 1 meet: exp(iτ) = exp(−iτ) = −1.
      [measured([-1, 0, 1, 2.5], [0.1, 0.2, 0.3, 0.4]), Math.PI, 3],
    ] as const) {
      const { phase } = traceMeasure(point, ask({ family: 'fixed', interval }), options);
      expect(phase).toMatchObject({ of: 'exact', winding });
      expect(phase.phase[0]).toBe(0);
      expect(phase.phase.at(-1)! / (2 * Math.PI)).toBeCloseTo(winding, 9);
      phase.phase.forEach((value, m) => expect(value).toBeGreaterThanOrEqual(m === 0 ? 0 : phase.phase[m - 1] - 1e-12));
    }
  });

  it('follows the Blaschke product z (z − c)/(1 − c z), c = cos gτ, of two levels', () => {
    // f_1 = cos gτ, f_n = −sin²gτ cos^{n−2}gτ: the sum is z(c − z)/(1 − c z) by geometric series.
    const c = Math.cos(0.3);
    const { phase } = traceMeasure(twoLevel(1), ask({ family: 'fixed', interval: 0.3 }), options);
    phase.angle.forEach((theta, m) => {
      const top = { re: c - Math.cos(theta), im: -Math.sin(theta) };
      const bottom = { re: 1 - c * Math.cos(theta), im: -c * Math.sin(theta) };
      const expected = theta + Math.atan2(top.im, top.re) - Math.atan2(bottom.im, bottom.re) - Math.PI;
      const turns = (phase.phase[m] - expected) / (2 * Math.PI);
      expect(Math.abs(turns - Math.round(turns))).toBeLessThan(1e-9);
    });
  });

  it('of a drawn sequence winds as the sampled winding number of that draw does, and repeats with its seed', () => {
    const point = measured([-1, 0, 1, 2.5], [0.1, 0.2, 0.3, 0.4]);
    const question = ask({ family: 'exponential', mean: 0.5 }, { budget: 200 });
    const one = traceMeasure(point, question, options).phase;
    expect(one).toMatchObject({ of: 'draw' });
    expect(traceMeasure(point, question, options).phase).toEqual(one);
    expect(traceMeasure(point, question, { ...options, draw: { seed: 1, number: 1 } }).phase.phase).not.toEqual(one.phase);
    expect(one.phase.at(-1)! / (2 * Math.PI)).toBeCloseTo(one.winding!, 9);
    expect(one.angle.at(-1)).toBeCloseTo(2 * Math.PI, 14);
  });

  it('of a blind detector and of a transition gives the phase of what the budget shows', () => {
    const fixed = { family: 'fixed', interval: 0.3 };
    expect(traceMeasure(twoLevel(1), ask(fixed, { detector: { efficiency: 0.5 } }), options).phase.of).toBe('budget');
    const { phase, survival } = traceMeasure(measured([-1, 1], [0.5, 0.5], [0.5, -0.5]), ask(fixed), options);
    expect(phase.of).toBe('budget');
    // Transition |left> → |right>: F_1 = sin²gτ.
    expect(survival[1]).toBeCloseTo(Math.cos(0.3) ** 2, 13);
  });
});
