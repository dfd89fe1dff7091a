/**
 * Infinite line by a path long enough that its ends are not felt, fixed intervals. Sources: Quantum walks: the first detected passage
 * time problem, Phys. Rev. E 95, 032141 (2017), 10.1103/PhysRevE.95.032141 (n⁻³ law; coefficient from memory); Dark states of quantum
 * search cause imperfect detection, Phys. Rev. Research 2, 043107 (2020), 10.1103/PhysRevResearch.2.043107 (P < 1).
 */
import { describe, expect, it } from 'vitest';
import { buildSchedule } from '../../src/schedules/registry.js';
import { detectionSeries } from '../../src/statistics/monitored.js';
import { pathMiddle } from '../support/reference-measure.js';

const fixed = (interval: number) => buildSchedule({ family: 'fixed', interval });

describe('return on the line', () => {
  // The front needs a time half/g to come back: n < half/(gτ). The rest of P beyond n is its n⁻³ tail.
  it.each([
    [0.25, 0.914590621169571],
    [0.5, 0.750582761069775],
    [1, 0.399428504205328],
    [1.2, 0.274347995674836],
  ])('P at gτ = %f', (tau, expected) => {
    const count = 600;
    const { detection } = detectionSeries(pathMiddle(Math.ceil(1.1 * tau * count) + 60), fixed(tau), count);
    const sum = detection.reduce((total, value) => total + value, 0);
    // Σ_{m>n} (4gτ/πm³) cos² averages to (gτ/π)/n²; the oscillation leaves of the order of one more term.
    const tail = tau / Math.PI / count ** 2;
    expect(Math.abs(sum + tail - expected)).toBeLessThan((3 * tau) / count ** 2.5);
  });
  it.each([0.3, 0.8, 1.3])('F_n → (4gτ/πn³) cos²(2gτn + π/4) at gτ = %f', (tau) => {
    const count = 1200;
    const { detection } = detectionSeries(pathMiddle(Math.ceil(1.1 * tau * count) + 60), fixed(tau), count);
    // Fit of the coefficient over the last two hundred; corrections are of relative order 1/n.
    let above = 0;
    let below = 0;
    for (let n = count - 200; n <= count; n++) {
      const shape = Math.cos(2 * tau * n + Math.PI / 4) ** 2;
      above += detection[n] * n ** 3 * shape;
      below += shape * shape;
    }
    expect(Math.abs(above / below / ((4 * tau) / Math.PI) - 1)).toBeLessThan(1e-2);
  });
  it.each([1, 2, 3])('gτ = %i π/2: F_n → gτ/(2πn³), a quarter of the generic law and without oscillation', (k) => {
    const tau = (k * Math.PI) / 2;
    const { detection } = detectionSeries(pathMiddle(Math.ceil(1.1 * tau * 800) + 60), fixed(tau), 800);
    // Corrections are of relative order 1/n: one Richardson step removes them, what remains is below 1 %.
    const scaled = (n: number): number => detection[n] * n ** 3;
    expect(Math.abs((2 * scaled(800) - scaled(400)) / (k / 4) - 1)).toBeLessThan(1e-2);
    expect(Math.abs((2 * scaled(799) - scaled(399)) / (k / 4) - 1)).toBeLessThan(1e-2);
  });
});
